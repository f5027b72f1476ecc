//! The field registry: names and order of the contract, units, nulls, rounding, and the page that lists it.

#[path = "support/results.rs"]
mod results;

use results::{assessed, one, point, result};
use spallcast::assess::Assessment;
use spallcast::flag::Flag;
use spallcast::output::burns::BURN_FIELDS;
use spallcast::output::fields::{BOULDER_FIELDS, BoulderResult, Field, JsonType, Value, markdown, number, significant};
use spallcast::output::inspection::INSPECTION_COLUMNS;
use spallcast::output::trails::TRAIL_FIELDS;

/// Result columns of the boulder layer in the agreed order. Written out here on purpose: what users script against.
const AGREED: &str = "status reason burn_id exposure_used exposure_inferred peak_surface_c_p05 peak_surface_c_p50 \
    peak_surface_c_p95 absorbed_mj_m2_p50 heated_depth_mm peak_skin_stress_mpa_p50 p_spall p_flake p_slab p_split p_rind \
    spall_thickness_mm spall_thickness_mm_p05 spall_thickness_mm_p50 spall_thickness_mm_p95 flake_thickness_mm \
    slab_thickness_mm loss_mm p_spall_se spall_thickness_mm_se p_source p_source_low p_source_high p_release p_fragment \
    source_mode source_basis fragment_m3_p50 horizon_days inspection_rank flags";

fn value<'r>(result: &'r BoulderResult, name: &str) -> Value<'r> {
    let field = BOULDER_FIELDS.iter().find(|f| f.name == name).unwrap_or_else(|| panic!("no field {name}"));
    (field.value)(result)
}

#[test]
fn the_boulder_layer_has_the_agreed_columns_in_the_agreed_order() {
    let names: Vec<&str> = BOULDER_FIELDS.iter().map(|f| f.name).collect();
    assert_eq!(names, AGREED.split_whitespace().collect::<Vec<_>>());
}

fn faults<R>(fields: &[Field<R>]) -> Vec<String> {
    let mut found = Vec::new();
    // Suffix of a name and the unit that it promises.
    let suffixes =
        [("_mm", "mm"), ("_c_p", "C"), ("_mpa", "MPa"), ("_mj_m2", "MJ/m2"), ("_m3", "m3"), ("_days", "days")];
    for f in fields {
        if !f.meaning.ends_with('.') || f.meaning.matches(". ").count() > 0 {
            found.push(format!("{}: the meaning is one sentence: {}", f.name, f.meaning));
        }
        for (suffix, unit) in suffixes {
            if f.name.contains(suffix) != (f.unit == unit) {
                found.push(format!("{}: the suffix {suffix} and the unit {:?} do not go together", f.name, f.unit));
            }
        }
        if fields.iter().filter(|g| g.name == f.name).count() > 1 {
            found.push(format!("{}: the name occurs twice", f.name));
        }
    }
    found
}

#[test]
fn names_carry_their_units_and_meanings_are_sentences() {
    let wrong = Field::<BoulderResult> {
        name: "loss_mm",
        unit: "m",
        kind: JsonType::Number,
        meaning: "Loss",
        value: |_| Value::Null,
    };
    assert_eq!(faults(&[wrong]).len(), 2, "the rule finds the fault planted for it");
    assert_eq!(faults(BOULDER_FIELDS), Vec::<String>::new());
    assert_eq!(faults(BURN_FIELDS), Vec::<String>::new());
    assert_eq!(faults(INSPECTION_COLUMNS), Vec::<String>::new());
    assert_eq!(faults(TRAIL_FIELDS), Vec::<String>::new());
}

#[test]
fn figures_are_in_field_units() {
    let r = result(one(point("A", "")));
    let expected = [
        ("peak_surface_c_p05", 300.0),
        ("peak_surface_c_p50", 400.0),
        ("peak_surface_c_p95", 500.0),
        ("absorbed_mj_m2_p50", 4.2),
        ("heated_depth_mm", 13.1),
        ("peak_skin_stress_mpa_p50", 151.0),
        ("p_spall", 0.75),
        ("p_flake", 0.625),
        ("p_slab", 0.25),
        ("p_split", 0.125),
        ("spall_thickness_mm", 7.2),
        ("spall_thickness_mm_p05", 1.1),
        ("spall_thickness_mm_p50", 5.2),
        ("spall_thickness_mm_p95", 26.3),
        ("flake_thickness_mm", 2.4),
        ("slab_thickness_mm", 30.8),
        ("loss_mm", 3.5),
        ("p_spall_se", 0.0061),
        ("spall_thickness_mm_se", 0.17),
        ("horizon_days", 180.0),
    ];
    for (name, x) in expected {
        assert_eq!(value(&r, name), Value::Number(x), "{name}");
    }
    assert_eq!(value(&r, "status"), Value::text("assessed"));
    assert_eq!(value(&r, "burn_id"), Value::text("unit-1"));
    assert_eq!(value(&r, "exposure_used"), Value::text("crown"));
    assert_eq!(value(&r, "exposure_inferred"), Value::Bool(false));
    assert_eq!(value(&r, "flags"), Value::text("weathering_assumed;moisture_assumed"), "in the order of the list");
}

#[test]
fn what_was_not_computed_is_null_and_never_zero() {
    let r = BoulderResult::new(one(point("A", "")), Assessment::not_assessed("why"), results::HORIZON_DAYS);
    let spoken = ["status", "reason", "source_basis", "horizon_days", "flags"];
    for field in BOULDER_FIELDS {
        let is_null = (field.value)(&r) == Value::Null;
        assert_eq!(is_null, !spoken.contains(&field.name), "{}", field.name);
    }
    assert_eq!(value(&r, "status"), Value::text("not_assessed"));
    assert_eq!(value(&r, "reason"), Value::text("why"));
    assert_eq!(value(&r, "source_basis"), Value::text("none"));
    assert_eq!(value(&r, "flags"), Value::text(""));
    // Assessed, but nothing spalled: likelihoods are 0, thicknesses do not exist.
    let mut r = result(one(point("A", "")));
    let spall = r.assessment.spall.as_mut().expect("assessed");
    (spall.p_spall, spall.thickness_m, spall.thickness_quantiles_m) = (0.0, None, None);
    (spall.flake_thickness_m, spall.slab_thickness_m, spall.thickness_se_m) = (None, None, None);
    assert_eq!(value(&r, "p_spall"), Value::Number(0.0));
    let thicknesses: Vec<_> = BOULDER_FIELDS.iter().filter(|f| f.name.contains("thickness")).collect();
    assert_eq!(thicknesses.len(), 7);
    for field in thicknesses {
        assert_eq!((field.value)(&r), Value::Null, "{}", field.name);
    }
    assert_eq!(value(&r, "p_rind"), Value::Null, "no rind was recorded");
}

#[test]
fn source_columns_join_reason_and_flags() {
    let mut r = result(one(point("A", "")));
    r.source.p_source_high = Some(0.41);
    r.source.basis = "partial";
    r.source.reason = Some("Most likely to slide.".to_owned());
    r.source.flags = [Flag::SourcePartial].into();
    assert_eq!(value(&r, "p_source_high"), Value::Number(0.41));
    assert_eq!(value(&r, "p_source"), Value::Null);
    assert_eq!(value(&r, "source_basis"), Value::text("partial"));
    assert_eq!(value(&r, "reason"), Value::text("granite in crown fire. Most likely to slide."));
    assert_eq!(value(&r, "flags"), Value::text("weathering_assumed;moisture_assumed;source_partial"));
}

#[test]
fn a_value_has_the_type_that_its_field_states() {
    let mut r = result(one(point("A", "")));
    r.inspection_rank = Some(3);
    let mut checked = 0;
    for field in BOULDER_FIELDS {
        let kind = match (field.value)(&r) {
            Value::Null => continue,
            Value::Bool(_) => JsonType::Bool,
            Value::Integer(_) => JsonType::Integer,
            Value::Number(_) => JsonType::Number,
            Value::Text(_) => JsonType::Text,
        };
        assert_eq!(kind, field.kind, "{}", field.name);
        checked += 1;
    }
    assert_eq!(checked, BOULDER_FIELDS.len() - 8, "all but p_rind and seven of the source");
}

#[test]
fn rounding_keeps_six_digits_and_writes_nothing_that_is_not_finite() {
    // Hand-made pairs; the last two are the edges of what a double holds.
    let pairs = [
        (0.0, 0.0),
        (-0.0, 0.0),
        (1.0 / 3.0, 0.333333),
        (2.0 / 3.0, 0.666667),
        (999_999.5, 1e6),
        (123_456_789.0, 123_457_000.0),
        (-0.000_012_345_678, -0.000_012_345_7),
        (63.0 / 512.0, 0.123047),
        (f64::MAX, 1.79769e308),
        (5e-324, 5e-324),
    ];
    for (x, rounded) in pairs {
        assert_eq!(significant(x).to_bits(), f64::to_bits(rounded), "{x}");
    }
    for x in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
        assert_eq!(number(x), Value::Null);
        let mut out = Vec::new();
        Value::Number(x).write_json(&mut out).expect("memory");
        assert_eq!(out, b"null", "even a value that bypassed the rounding");
    }
    let mut broken = assessed();
    broken.spall.as_mut().expect("assessed").loss_m = f64::NAN;
    let r = BoulderResult::new(one(point("A", "")), broken, f64::INFINITY);
    assert_eq!(value(&r, "loss_mm"), Value::Null);
    assert_eq!(value(&r, "horizon_days"), Value::Null);
}

/// The tables of `docs/outputs.md` are those of the registries. On a difference the fresh table is printed: paste it.
#[test]
fn the_page_lists_the_columns_as_they_are() {
    const PAGE: &str = include_str!("../docs/outputs.md");
    let tables = [
        ("boulders.geojson", markdown(BOULDER_FIELDS)),
        ("burns.geojson", markdown(BURN_FIELDS)),
        ("trails.geojson", markdown(TRAIL_FIELDS)),
        ("inspection.csv", markdown(INSPECTION_COLUMNS)),
    ];
    let stale: String = (tables.iter())
        .filter(|(_, table)| !PAGE.contains(table.as_str()))
        .map(|(name, table)| format!("\n{name}:\n\n{table}"))
        .collect();
    assert!(stale.is_empty(), "docs/outputs.md is out of step; the fresh tables are:\n{stale}");
    let altered = markdown(BOULDER_FIELDS).replace("likelihood", "chance").replace("Likelihood", "Chance");
    assert!(!PAGE.contains(&altered), "the check notices a changed meaning");
}
