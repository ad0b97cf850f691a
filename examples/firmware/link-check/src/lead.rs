use phase4::lead::{ChannelParams, Lead, LeadChange, NearField};

crate::entries! { LEAD:
    NearField::check as fn(_);
    ChannelParams::at as fn(_, _);
    LeadChange::check as fn(_);
    Lead::new as fn(_);
    Lead::activated as fn(_, _);
    Lead::show as fn(_, _, _, _, _);
    Lead::change as fn(_, _, _);
    Lead::pace_site as fn(_, _);
    Lead::overtaken as fn(_);
    Lead::next_at as fn(_);
    Lead::poll as fn(_, _);
}
