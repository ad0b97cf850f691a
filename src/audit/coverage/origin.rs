//! Where waves began: what fired the site they come from first, followed along the tracts that are known.

use crate::base::{Cause, CauseKind, FocusId, Kind, Record, SiteId, TractId};

/// As many sites and tracts as an anatomy has at most.
const MOST: usize = 32;

/// What first set off each wave.
#[derive(Debug, Clone)]
pub(super) struct Origins {
    ends: [Option<(SiteId, SiteId)>; MOST],
    /// What set off the last activation of each site.
    sites: [CauseKind; MOST],
    /// What set off the last wave that fired a site at the end of each tract.
    waves: [CauseKind; MOST],
    /// Foci that stand for the heart's own rhythm, a bit each.
    rhythms: u32,
}

impl Origins {
    pub(super) const fn new() -> Self {
        Self { ends: [None; MOST], sites: [CauseKind::None; MOST], waves: [CauseKind::Conducted; MOST], rhythms: 0 }
    }

    pub(super) fn know_tract(&mut self, tract: TractId, from: SiteId, to: SiteId) {
        if let Some(ends) = self.ends.get_mut(usize::from(tract.row())) {
            *ends = Some((from, to));
        }
    }

    pub(super) fn know_rhythm(&mut self, focus: FocusId) {
        self.rhythms |= 1_u32.checked_shl(u32::from(focus.row())).unwrap_or(0);
    }

    /// Follows an activation.
    pub(super) fn record(&mut self, record: &Record) {
        if record.kind != Kind::Activated {
            return;
        }
        let mut origin = self.own(record.cause);
        if record.cause.kind == CauseKind::Conducted
            && let Some(Some((from, to))) = self.ends.get(usize::from(record.cause.id)).copied()
        {
            let beyond = if to.row() == record.place { from } else { to };
            origin = self.sites.get(usize::from(beyond.row())).copied().unwrap_or(CauseKind::Conducted);
            if let Some(wave) = self.waves.get_mut(usize::from(record.cause.id)) {
                *wave = origin;
            }
        }
        if let Some(site) = self.sites.get_mut(usize::from(record.place)) {
            *site = origin;
        }
    }

    /// What first set off the activation that has this cause; a conducted one stays that where its tract is not known.
    pub(super) fn of(&self, cause: Cause) -> CauseKind {
        match cause.kind {
            CauseKind::Conducted => self.waves.get(usize::from(cause.id)).copied().unwrap_or(CauseKind::Conducted),
            _ => self.own(cause),
        }
    }

    /// The cause itself; that of a focus which stands for the rhythm is the rhythm.
    fn own(&self, cause: Cause) -> CauseKind {
        let is_rhythm = self.rhythms.checked_shr(u32::from(cause.id)).unwrap_or(0) & 1 == 1;
        if cause.kind == CauseKind::Focus && is_rhythm { CauseKind::Own } else { cause.kind }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Instant;

    #[test]
    fn a_wave_keeps_what_set_it_off() {
        let mut origins = Origins::new();
        origins.know_tract(TractId::new(0), SiteId::new(0), SiteId::new(1));
        origins.know_tract(TractId::new(1), SiteId::new(1), SiteId::new(2));
        origins.know_rhythm(FocusId::new(0));
        let fire = |origins: &mut Origins, site, kind, id| {
            origins.record(&Record::new(Instant::ZERO, Kind::Activated, site, Cause::new(kind, id)));
        };
        let seen = Cause::new(CauseKind::Conducted, 1);
        // A beat of the first site, down to the third.
        for (first, origin) in [
            ((CauseKind::Own, 0), CauseKind::Own),
            ((CauseKind::Script, 3), CauseKind::Script),
            ((CauseKind::Focus, 0), CauseKind::Own),
            ((CauseKind::Focus, 1), CauseKind::Focus),
        ] {
            fire(&mut origins, 0, first.0, first.1);
            fire(&mut origins, 1, CauseKind::Conducted, 0);
            fire(&mut origins, 2, CauseKind::Conducted, 1);
            assert_eq!(origins.of(seen), origin);
        }
        // And one of the third site, up: backward through the same tracts.
        fire(&mut origins, 2, CauseKind::Pulse, 1);
        fire(&mut origins, 1, CauseKind::Conducted, 1);
        fire(&mut origins, 0, CauseKind::Conducted, 0);
        assert_eq!(origins.of(Cause::new(CauseKind::Conducted, 0)), CauseKind::Pulse);
        assert_eq!(origins.of(Cause::new(CauseKind::Conducted, 9)), CauseKind::Conducted, "a tract that nobody told of");
    }
}
