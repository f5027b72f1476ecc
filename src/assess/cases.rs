//! Boulders whose thermal case is equal are solved once.
//!
//! A case is everything that [`Model::assess_with_draws`] looks at: rock, kind, size, heating record, covering burns. Two
//! records with the same case get the same bits whether the second is solved or looked up. The store is bounded, so that
//! an inventory of distinct boulders of any length runs in the same memory.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

use super::{Assessment, Model};
use crate::rockfall::SpallDraw;
use crate::site::{Boulder, Burn};

/// Draws that are kept in all, 56 bytes each.
const DRAWS_KEPT: usize = 1 << 20;

/// A solved case.
#[derive(Debug, Clone)]
pub struct Case {
    /// What is said about the boulder.
    pub assessment: Assessment,
    /// What every draw means for the statics; empty when it was not assessed.
    pub spalls: Vec<SpallDraw>,
}

/// Solved cases of a run.
#[derive(Debug)]
pub struct Cases<'a> {
    model: &'a Model,
    capacity: usize,
    solved: Mutex<HashMap<String, Arc<OnceLock<Arc<Case>>>>>,
}

impl<'a> Cases<'a> {
    /// An empty store.
    pub fn new(model: &'a Model) -> Cases<'a> {
        let capacity = DRAWS_KEPT / model.points.draws();
        Cases { model, capacity, solved: Mutex::new(HashMap::new()) }
    }

    /// The case of a boulder under the burns that cover it, solved now unless an equal one was before.
    pub fn solve(&self, boulder: &Boulder, burns: &[&Burn]) -> Arc<Case> {
        let key = key(boulder, burns);
        let solve = || {
            let (assessment, draws) = self.model.assess_with_draws(boulder, burns);
            Arc::new(Case { assessment, spalls: self.model.spall_draws(&draws) })
        };
        let place = {
            let mut store = self.solved.lock().unwrap_or_else(PoisonError::into_inner);
            match store.get(&key) {
                Some(place) => Arc::clone(place),
                None if store.len() < self.capacity => Arc::clone(store.entry(key).or_default()),
                None => return solve(),
            }
        };
        // Solved outside the lock of the store. A thread that meets a case under way waits for it: solving it too would take as long.
        Arc::clone(place.get_or_init(solve))
    }
}

/// Everything that the thermal model looks at. Numbers are written so that they read back to the same bits.
fn key(boulder: &Boulder, burns: &[&Burn]) -> String {
    let Boulder { id: _, position: _, rock, kind, radius_m, axes_m: _, heating, standing: _ } = boulder;
    let ids: Vec<&str> = burns.iter().map(|b| b.id.as_str()).collect();
    format!("{rock:?} {kind:?} {radius_m:?} {heating:?} {ids:?}")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fire::exposure::ExposureClass;
    use crate::rock::catalogue::Catalogue;
    use crate::settings::Settings;
    use crate::site::{HeatingRecord, Kind, Position, RockChoice, StandingRecord};

    #[test]
    fn equal_cases_are_shared_and_unequal_ones_are_not() {
        let model = Model::new(Settings { draws: 16, ..Settings::default() }, Catalogue::embedded()).unwrap();
        let cases = Cases::new(&model);
        let boulder = |id: &str, radius: f64| Boulder {
            id: id.into(),
            position: Position { lon_deg: radius, lat_deg: 0.0, height_m: None },
            rock: RockChoice::Named("granite".into()),
            kind: Kind::Boulder,
            radius_m: Some(radius),
            axes_m: None,
            heating: HeatingRecord { exposure: Some(ExposureClass::Crown), ..HeatingRecord::default() },
            standing: StandingRecord::default(),
        };
        let first = cases.solve(&boulder("a", 0.5), &[]);
        let same = cases.solve(&boulder("b", 0.5), &[]);
        let other = cases.solve(&boulder("c", 0.6), &[]);
        assert!(Arc::ptr_eq(&first, &same) && !Arc::ptr_eq(&first, &other));
        let (assessment, draws) = model.assess_with_draws(&boulder("d", 0.5), &[]);
        assert_eq!((&assessment, &model.spall_draws(&draws)), (&same.assessment, &same.spalls));
    }
}
