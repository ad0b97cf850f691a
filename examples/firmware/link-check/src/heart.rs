use phase4::heart::{self, CellParams, FocusParams, Fraction, SiteParams, TractParams, Way};

/// As large as the plain anatomy, with a focus of each kind.
type Anatomy = heart::Anatomy<5, 4, 3>;
type Heart = heart::Heart<'static, 5, 4, 3, 2>;
type Unprovoked = heart::Heart<'static, 5, 4, 3, 0>;

crate::entries! { ANATOMY:
    Fraction::from_millionths as fn(_);
    Fraction::complement as fn(_);
    Fraction::of as fn(_, _);
    SiteParams::new as fn(_);
    SiteParams::with_relative as fn(_, _);
    SiteParams::with_threshold as fn(_, _, _);
    SiteParams::with_latency as fn(_, _);
    Way::new as fn(_);
    Way::closed as fn(_);
    Way::with_recovery as fn(_, _, _);
    Way::with_theta as fn(_, _);
    Way::with_conceal as fn(_, _);
    Way::delay as fn(_, _);
    TractParams::new as fn(_, _, _, _, _);
    CellParams::new as fn(_, _);
    FocusParams::premature as fn(_, _);
    FocusParams::premature_after as fn(_, _, _, _);
    FocusParams::replay as fn(_, _, _, _);
    Anatomy::new as fn(_, _, _);
    Anatomy::site as fn(_, _);
    Anatomy::tract as fn(_, _);
    Anatomy::cell as fn(_, _);
    Anatomy::sites as fn(_);
    Anatomy::tracts as fn(_);
    Anatomy::cells as fn(_);
}

crate::entries! { HEART:
    Heart::new as fn(_, _, _);
    Heart::next_at as fn(_);
    Heart::poll as fn(_, _);
    Heart::pulse as fn(_, _, _, _);
    Heart::beat as fn(_, _, _, _);
    Heart::arrest as fn(_, _, _);
    Heart::release as fn(_, _, _);
    Heart::shut as fn(_, _, _, _);
    Heart::open as fn(_, _, _, _);
    Heart::quiet as fn(_, _);
    Unprovoked::new as fn(_, _, _);
    Unprovoked::poll as fn(_, _);
}
