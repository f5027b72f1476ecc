//! Which fires a boulder stood in: from its record and the burns that cover it.
//!
//! Rules (fire page, building the history): the boulder's own residence and class go before the burn's; a class that is
//! not given is inferred from the residence; overlapping burns give the longest residence unless they are dated, in which
//! case each is a fire of its own; a log against the rock is a second stage on a patch.

use std::collections::BTreeSet;

use crate::fire::exposure::ExposureClass;
use crate::fire::flame;
use crate::flag::Flag;
use crate::site::{Boulder, Burn};

/// Scatter of a recorded residence that carries none of its own (judgement).
pub const RESIDENCE_GSD: f64 = 1.35;

/// One fire at one boulder.
#[derive(Debug, Clone, PartialEq)]
pub struct Fire {
    /// The burn it belongs to.
    pub burn_id: Option<String>,
    /// Classes with equal shares; more than one only when inferred.
    pub classes: Vec<ExposureClass>,
    /// The class was inferred.
    pub inferred: bool,
    /// Recorded median residence, s, and its geometric standard deviation.
    pub residence: Option<(f64, f64)>,
    /// Flame length, m, recorded or from fireline intensity.
    pub flame_length_m: Option<f64>,
    /// Rate of spread, m/s.
    pub spread_rate_m_s: Option<f64>,
    /// Fuel load, kg/m2.
    pub fuel_load_kg_m2: Option<f64>,
    /// Distance from the flames, m.
    pub standoff_m: Option<f64>,
    /// Diameter of the log when this is the second stage along one, m.
    pub log_diameter_m: Option<f64>,
}

/// Flame length of a class where nothing about it is recorded, m (assumption).
fn class_flame_length_m(class: ExposureClass) -> f64 {
    match class {
        ExposureClass::LightSurface => 0.3,
        ExposureClass::Grass => 1.5,
        ExposureClass::Shrub => 3.0,
        ExposureClass::ForestSurface => 1.0,
        ExposureClass::Crown => 20.0,
        ExposureClass::HeavyDeadWood => 2.0,
        ExposureClass::LogContact => 1.0,
        ExposureClass::SmoulderingContact => 0.2,
    }
}

impl Fire {
    /// Flame length for the stand-off, m.
    pub fn flame_length_or_default_m(&self) -> f64 {
        self.flame_length_m.unwrap_or_else(|| class_flame_length_m(self.classes[0]))
    }

    /// The classes as one word.
    pub fn exposure_word(&self) -> String {
        self.classes.iter().map(|c| c.word()).collect::<Vec<_>>().join("+")
    }

    /// Median residence, recorded or of the class, s.
    pub fn median_residence_s(&self) -> f64 {
        self.residence.map_or_else(|| self.classes[0].figures().residence_s.median(), |r| r.0)
    }

    fn new(boulder: &Boulder, burn: Option<&Burn>) -> Option<Fire> {
        let heating = &boulder.heating;
        let residence_s = heating.residence_s.or(burn.and_then(|b| b.residence_s));
        let gsd = match heating.residence_s {
            Some(_) => RESIDENCE_GSD,
            None => burn.and_then(|b| b.residence_gsd).unwrap_or(RESIDENCE_GSD),
        };
        let given = heating.exposure.or(burn.and_then(|b| b.exposure));
        let classes = match (given, residence_s) {
            (Some(class), _) => vec![class],
            (None, Some(residence)) => ExposureClass::inferred_from_residence(residence).to_vec(),
            (None, None) => return None,
        };
        let crown = classes[0] == ExposureClass::Crown;
        // Flames of the front say nothing about a log or duff that burns against the rock.
        let front = burn.filter(|_| !classes[0].is_contact());
        let flame_length_m = front.and_then(|b| b.flame_length_m).or_else(|| {
            let intensity = front.and_then(|b| b.fireline_intensity_w_m)?;
            Some(if crown { flame::crown_flame_length_m(intensity) } else { flame::flame_length_m(intensity) })
        });
        Some(Fire {
            burn_id: burn.map(|b| b.id.clone()),
            classes,
            inferred: given.is_none(),
            residence: residence_s.map(|r| (r, gsd)),
            flame_length_m,
            spread_rate_m_s: front.and_then(|b| b.spread_rate_m_s),
            fuel_load_kg_m2: burn.and_then(|b| b.fuel_load_kg_m2),
            standoff_m: heating.standoff_m.filter(|s| *s > 0.0),
            log_diameter_m: None,
        })
    }
}

/// The fires of a boulder under the burns that cover it, or the reason why there are none to compute.
pub fn fires_at(boulder: &Boulder, burns: &[&Burn], flags: &mut BTreeSet<Flag>) -> Result<Vec<Fire>, String> {
    let heating = &boulder.heating;
    let own = heating.residence_s.is_some() || heating.exposure.is_some();
    if own {
        flags.insert(Flag::ExposureFromBoulder);
    }
    if burns.is_empty() && !own {
        return Err("outside every burn polygon and without a residence time or exposure class of its own; \
                    add residence_min or exposure to the record if fire reached it"
            .to_owned());
    }
    let mut fires = Vec::new();
    if burns.is_empty() {
        fires.extend(Fire::new(boulder, None));
    }
    let dates: BTreeSet<_> = burns.iter().map(|b| b.burned_on).collect();
    for date in &dates {
        let same: Vec<Fire> =
            burns.iter().filter(|b| b.burned_on == *date).filter_map(|b| Fire::new(boulder, Some(b))).collect();
        if same.len() > 1 {
            flags.insert(Flag::OverlappingBurns);
        }
        let longest = same.into_iter().max_by(|a, b| {
            a.median_residence_s().total_cmp(&b.median_residence_s()).then_with(|| b.burn_id.cmp(&a.burn_id))
        });
        fires.extend(longest);
    }
    if fires.is_empty() {
        let names = burns.iter().map(|b| b.id.as_str()).collect::<Vec<_>>().join(", ");
        return Err(format!(
            "burn {names} has neither residence_min nor exposure, and the boulder has none of its own; add one of them"
        ));
    }
    if fires.len() > 1 {
        flags.insert(Flag::SeveralFires);
    }
    if fires.iter().any(|f| f.inferred) {
        flags.insert(Flag::ExposureInferred);
    }
    if fires.iter().any(|f| f.residence.is_none()) {
        flags.insert(Flag::ResidenceFromClass);
    }
    if let Some(diameter) = heating.log_diameter_m.filter(|_| !fires[0].classes[0].is_contact()) {
        flags.insert(Flag::LogStage);
        fires.push(Fire {
            classes: vec![ExposureClass::LogContact],
            inferred: false,
            residence: Some((flame::log_burnout_s(diameter), RESIDENCE_GSD)),
            flame_length_m: None,
            spread_rate_m_s: None,
            standoff_m: None,
            log_diameter_m: Some(diameter),
            ..fires[0].clone()
        });
    }
    Ok(fires)
}
