//! A field's name in words, by rule: prefixes and quantile suffixes are spelt out and the unit, shown beside, is left out.

/// Prefixes and what they say.
const PREFIXES: [(&str, &str); 3] =
    [("p_any", "likelihood of arrival"), ("p_", "likelihood of "), ("death_", "death ")];
/// Suffixes and what they say, tried until none fits.
const SUFFIXES: [(&str, &str); 6] = [
    ("_p05", ", 5 % quantile"),
    ("_p50", ", median"),
    ("_p95", ", 95 % quantile"),
    ("_se", ", sampling error"),
    ("_low", ", low"),
    ("_high", ", high"),
];
/// Unit suffixes of names.
const UNITS: [&str; 9] = ["_mj_m2", "_mpa", "_mm", "_m3", "_kw_m2", "_min", "_days", "_c", "_m"];

/// The label of a field.
///
/// ```
/// use spallcast::report::label::label;
/// assert_eq!(label("peak_surface_c_p95"), "peak surface, 95 % quantile");
/// assert_eq!(label("p_source_high"), "likelihood of source, high");
/// assert_eq!(label("spall_thickness_mm"), "spall thickness");
/// ```
pub fn label(name: &str) -> String {
    let mut rest = name;
    let mut tail = String::new();
    while let Some((suffix, words)) = SUFFIXES.iter().find(|(suffix, _)| rest.ends_with(suffix)) {
        rest = &rest[..rest.len() - suffix.len()];
        tail.insert_str(0, words);
    }
    if let Some(unit) = UNITS.iter().find(|unit| rest.ends_with(**unit)) {
        rest = &rest[..rest.len() - unit.len()];
    }
    let (head, rest) = match PREFIXES.iter().find(|(prefix, _)| rest.starts_with(prefix)) {
        Some((prefix, words)) => (*words, &rest[prefix.len()..]),
        None => ("", rest),
    };
    format!("{head}{}{tail}", rest.replace('_', " "))
}
