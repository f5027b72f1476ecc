//! Median draws of a rock in a class, and their corners, shared by the suites on pulses and trends.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use spallcast::assess::draws::{Body, Draw};
use spallcast::assess::fires::Fire;
use spallcast::assess::probe::{Fixed, History, MedianDraw, Probe, median_draw, run};
use spallcast::assess::tables::{RockTable, Tables};
use spallcast::ensemble::points::PointSet;
use spallcast::fire::exposure::ExposureClass;
use spallcast::rock::catalogue::Catalogue;
use spallcast::settings::SpallSettings;
use spallcast::site::{Kind, Moisture, Weathering};

/// Width of the flame front, m: no stand-off is used here, so it has no effect.
const FRONT_M: f64 = 100.0;

/// The catalogue at the smallest point set: only medians are taken from it.
pub fn tables() -> Tables {
    Tables::new(&Catalogue::embedded(), &PointSet::new(16, 1))
}

pub fn table<'a>(tables: &'a Tables, rock: &str) -> &'a RockTable {
    &tables.rocks[tables.rock_index(rock).unwrap_or_else(|| panic!("no rock {rock}"))]
}

/// A fresh dry boulder.
pub fn boulder(radius_m: f64) -> Body {
    Body {
        kind: Kind::Boulder,
        radius_m: Some(radius_m),
        weathering: Weathering::Fresh,
        moisture: Moisture::Dry,
        rind_m: None,
    }
}

/// A fire of one class and nothing else recorded; residence in s where given.
pub fn fire(class: ExposureClass, residence_s: Option<f64>) -> Fire {
    Fire {
        burn_id: None,
        classes: vec![class],
        inferred: false,
        residence: residence_s.map(|t| (t, 1.0)),
        flame_length_m: None,
        spread_rate_m_s: None,
        fuel_load_kg_m2: None,
        standoff_m: None,
        log_diameter_m: None,
    }
}

/// The median draw of a rock and body in a fire.
pub fn median(table: &RockTable, body: &Body, fire: &Fire, fixed: &Fixed) -> MedianDraw {
    median_draw(table, body, &History::Fire(fire.clone()), fixed, None, FRONT_M).unwrap()
}

/// A probe on a draw.
pub fn probe(
    table: &RockTable,
    body: &Body,
    fire: &Fire,
    median: &MedianDraw,
    depth_m: &[f64],
    time_s: &[f64],
) -> Probe {
    run(table, body, &History::Fire(fire.clone()), median, depth_m, time_s, &SpallSettings::default())
}

/// Shares of the residence and of the irradiance (or, where a class has none, of the gas temperature) at the corners.
pub const CORNERS: [(f64, f64); 5] = [(0.5, 0.5), (0.05, 0.05), (0.05, 0.95), (0.95, 0.05), (0.95, 0.95)];

/// The draw of a class at the shares `(residence, irradiance)`, all else at its median.
pub fn corner(table: &RockTable, body: &Body, class: ExposureClass, shares: (f64, f64)) -> Draw {
    let figures = class.figures();
    let mut fixed = Fixed::default();
    match figures.irradiance_w_m2 {
        Some(d) => fixed.irradiance_w_m2 = Some(d.quantile(shares.1)),
        None => fixed.gas_k = Some(figures.gas_k.quantile(shares.1)),
    }
    median(table, body, &fire(class, Some(figures.residence_s.quantile(shares.0))), &fixed).draw
}
