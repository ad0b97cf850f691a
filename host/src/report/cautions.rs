//! What the page must not be taken for.

use super::page::Section;
use maud::html;

pub(super) fn section() -> Section {
    let body = html! {
        ul.caut {
            li { "For the bench only. Never connect this bench, or a device driven by it, to a person." }
            li { "“Holds” means: nothing broke the rule in the cases that were tried. It says nothing about cases that were not." }
            li { "“Not exercised” means nobody looked. It is not a good result." }
            li { "The heart is a model. It shows timing, not how a patient would fare." }
            li { "This is not a medical device, and this page is by itself no evidence of conformity with anything. Isolation and local electrical codes, licensed practice and the maker’s own process decide." }
        }
    };
    Section { id: "cautions", name: "Cautions", title: "Cautions".to_owned(), side: html! {}, body, full: false }
}
