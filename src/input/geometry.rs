//! Positions, rings and footprints: what GeoJSON allows and a map does not.
//!
//! Everything is checked before it becomes a `geo` type: lengths, finiteness and ranges of positions (naming metres and
//! swapped order as the likely causes), closure and self-crossing of rings. Perimeters and footprints across the
//! antimeridian are shifted into one window of longitudes for the planar predicates; perimeters are cut there afterwards.
//! Crossings are found by a sweep over the edges, so a perimeter of a hundred thousand vertices takes milliseconds.

use std::borrow::Cow;

use ::geojson::{GeometryValue, Position as RawPosition};
use geo::sweep::{Cross, Intersections};
use geo::{
    Area, BooleanOps, Coord, InteriorPoint, Line, LineIntersection, LineString, MapCoords, MultiPolygon, Orient,
    Polygon, Rect,
};
use serde::Deserialize;
use serde_json::value::RawValue;

use super::values::show;
use crate::bounds;
use crate::site::Position;

/// Why a geometry cannot be used.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Flaw {
    pub(crate) code: &'static str,
    pub(crate) found: String,
    pub(crate) expected: String,
    pub(crate) remedy: String,
}

fn flaw(code: &'static str, found: impl Into<String>, expected: &str, remedy: &str) -> Flaw {
    Flaw { code, found: found.into(), expected: expected.to_owned(), remedy: remedy.to_owned() }
}

#[derive(Deserialize)]
struct RawGeometry<'a> {
    #[serde(borrow, rename = "type")]
    kind: Cow<'a, str>,
    #[serde(borrow)]
    coordinates: Option<&'a RawValue>,
}

/// Reads a geometry and checks every position.
pub(crate) fn parse(raw: Option<&RawValue>, wanted: &str) -> Result<GeometryValue, Flaw> {
    let missing = |found: &str| flaw("geometry_missing", found, wanted, "add the geometry or remove the record");
    let Some(raw) = raw else {
        return Err(missing("the geometry is null or missing"));
    };
    let unreadable = |found: String| {
        flaw("geometry_unreadable", found, wanted, "write coordinates as arrays of numbers, longitude then latitude")
    };
    let geometry: RawGeometry<'_> = serde_json::from_str(raw.get())
        .map_err(|e| unreadable(format!("the geometry cannot be read: {}", place(&e))))?;
    let coordinates = geometry.coordinates.map_or("null", RawValue::get);
    fn read<'a, T: Deserialize<'a>>(json: &'a str) -> Result<T, String> {
        serde_json::from_str(json).map_err(|e| format!("the coordinates cannot be read: {}", place(&e)))
    }
    let wrong_kind = |kind: &str| {
        flaw("geometry_kind", format!("the geometry is {}", show(kind)), wanted, "split or convert the geometry")
    };
    let value = match geometry.kind.as_ref() {
        "Point" => read(coordinates).map(|coordinates| GeometryValue::Point { coordinates }),
        "MultiPoint" => read(coordinates).map(|coordinates| GeometryValue::MultiPoint { coordinates }),
        "LineString" => read(coordinates).map(|coordinates| GeometryValue::LineString { coordinates }),
        "MultiLineString" => read(coordinates).map(|coordinates| GeometryValue::MultiLineString { coordinates }),
        "Polygon" => read(coordinates).map(|coordinates| GeometryValue::Polygon { coordinates }),
        "MultiPolygon" => read(coordinates).map(|coordinates| GeometryValue::MultiPolygon { coordinates }),
        other => return Err(wrong_kind(other)),
    }
    .map_err(unreadable)?;
    let mut any = false;
    let mut first_flaw = None;
    each_position(&value, &mut |p| {
        any = true;
        if first_flaw.is_none() {
            first_flaw = flat(p).err();
        }
    });
    match first_flaw {
        Some(flaw) => Err(flaw),
        None if !any => Err(missing("the geometry holds no coordinates")),
        None => Ok(value),
    }
}

fn place(error: &serde_json::Error) -> String {
    error.to_string().split(" at line ").next().unwrap_or_default().to_owned()
}

fn each_position(value: &GeometryValue, each: &mut dyn FnMut(&RawPosition)) {
    match value {
        GeometryValue::Point { coordinates } => each(coordinates),
        GeometryValue::MultiPoint { coordinates } | GeometryValue::LineString { coordinates } => {
            coordinates.iter().for_each(each);
        }
        GeometryValue::MultiLineString { coordinates } | GeometryValue::Polygon { coordinates } => {
            coordinates.iter().flatten().for_each(each);
        }
        GeometryValue::MultiPolygon { coordinates } => coordinates.iter().flatten().flatten().for_each(each),
        GeometryValue::GeometryCollection { .. } => {}
    }
}

/// One position with its height, checked. A fourth number is allowed by the standard and ignored.
pub(crate) fn position(raw: &RawPosition) -> Result<Position, Flaw> {
    let Coord { x: lon_deg, y: lat_deg } = flat(raw)?;
    let height_m = raw.as_slice().get(2).copied();
    let range = bounds::bound("elevation_m").expect("the range table has heights");
    if let Some(h) = height_m.filter(|h| !range.holds(*h)) {
        return Err(flaw(
            "height_out_of_range",
            format!("the height is {h}"),
            &format!("{} m", range.range()),
            "give heights in metres above sea level or leave them out",
        ));
    }
    Ok(Position { lon_deg, lat_deg, height_m })
}

/// Longitude and latitude of one position, checked.
fn flat(raw: &RawPosition) -> Result<Coord<f64>, Flaw> {
    let numbers = raw.as_slice();
    let [lon, lat, ..] = *numbers else {
        return Err(flaw(
            "position_short",
            format!("a position has {} number{}", numbers.len(), if numbers.len() == 1 { "" } else { "s" }),
            "longitude, latitude and optionally height",
            "complete the position",
        ));
    };
    place_on_earth(lon, lat)?;
    Ok(Coord { x: lon, y: lat })
}

/// Longitude and latitude in range, or the likely cause why not.
pub(crate) fn place_on_earth(lon: f64, lat: f64) -> Result<(), Flaw> {
    let expected = "longitude -180 to 180 and latitude -90 to 90, degrees";
    let found = format!("the position is {lon}, {lat}");
    if !lon.is_finite() || !lat.is_finite() {
        return Err(flaw("not_finite", found, expected, "measure the position again"));
    }
    let (x, y) = (lon.abs(), lat.abs());
    if x <= 180.0 && y <= 90.0 {
        return Ok(());
    }
    let remedy = if x <= 90.0 && y <= 180.0 {
        "latitude and longitude are probably swapped; write longitude first"
    } else if x <= 360.0 && y <= 90.0 {
        "a longitude past 180 belongs on the other side of the date line; subtract 360"
    } else {
        "these are probably projected metres; export the layer in WGS 84 degrees"
    };
    Err(flaw("coordinates_out_of_range", found, expected, remedy))
}

/// One edge of a polygon, with its place in its ring.
#[derive(Clone, Copy)]
struct Edge {
    line: Line<f64>,
    ring: usize,
    at: usize,
    last: usize,
}

impl Cross for Edge {
    type Scalar = f64;
    fn line(&self) -> Line<f64> {
        self.line
    }
}

/// A polygon whose rings are closed, do not cross, and lie in one window of longitudes: past 180 where it spans the
/// antimeridian. Exterior counter-clockwise.
pub(crate) fn polygon(rings: &[Vec<RawPosition>]) -> Result<Polygon<f64>, Flaw> {
    let mut lines = Vec::with_capacity(rings.len());
    for ring in rings {
        lines.push(closed_ring(ring)?);
    }
    if lines.is_empty() {
        return Err(flaw("geometry_missing", "the polygon has no ring", "a closed ring", "draw the outline again"));
    }
    if lines.iter().any(|r| r.windows(2).any(|w| (w[1].x - w[0].x).abs() > 180.0)) {
        for corner in lines.iter_mut().flatten().filter(|c| c.x < 0.0) {
            corner.x += 360.0;
        }
    }
    no_crossing(&lines)?;
    let mut lines = lines.into_iter().map(LineString::new);
    let exterior = lines.next().expect("at least one ring");
    let polygon = Polygon::new(exterior, lines.collect());
    if polygon.unsigned_area() <= 0.0 {
        return Err(flaw("ring_without_area", "a ring encloses no area", "an outline", "draw the outline again"));
    }
    Ok(polygon.orient(geo::orient::Direction::Default))
}

fn closed_ring(ring: &[RawPosition]) -> Result<Vec<Coord<f64>>, Flaw> {
    let corners = ring.iter().map(flat);
    let mut corners = corners.collect::<Result<Vec<_>, _>>()?;
    if corners.len() < 4 {
        return Err(flaw(
            "ring_too_short",
            format!("a ring has {} positions", corners.len()),
            "at least four, the last equal to the first",
            "complete the ring",
        ));
    }
    let (first, last) = (corners[0], corners[corners.len() - 1]);
    if first != last {
        return Err(flaw(
            "ring_not_closed",
            format!("a ring starts at {}, {} and ends at {}, {}", first.x, first.y, last.x, last.y),
            "a last position equal to the first",
            "repeat the first position at the end",
        ));
    }
    corners.dedup();
    if corners.len() < 4 {
        return Err(flaw("ring_without_area", "a ring encloses no area", "an outline", "draw the outline again"));
    }
    Ok(corners)
}

/// Refuses edges that cross or run along one another. Rings that touch in a point are let pass.
fn no_crossing(rings: &[Vec<Coord<f64>>]) -> Result<(), Flaw> {
    // The sweep goes along x; it is fast when edges are short that way, so x and y change places when that helps.
    let steps = || rings.iter().flat_map(|r| r.windows(2));
    let along = |length: fn(&[Coord<f64>]) -> f64| {
        let (longest, total) = steps().fold((0.0, 0.0), |(m, s): (f64, f64), w| (m.max(length(w)), s + length(w)));
        if longest > 0.0 { total / longest } else { 0.0 }
    };
    let turned = along(|w| (w[1].x - w[0].x).abs()) > along(|w| (w[1].y - w[0].y).abs());
    let turn = |c: Coord<f64>| if turned { Coord { x: c.y, y: c.x } } else { c };
    let edges = rings.iter().enumerate().flat_map(|(ring, corners)| {
        let last = corners.len() - 2;
        corners.windows(2).enumerate().map(move |(at, w)| Edge {
            line: Line::new(turn(w[0]), turn(w[1])),
            ring,
            at,
            last,
        })
    });
    for (a, b, meeting) in edges.collect::<Intersections<Edge>>() {
        let at = match meeting {
            LineIntersection::SinglePoint { is_proper: true, intersection } => intersection,
            LineIntersection::SinglePoint { .. } => continue,
            LineIntersection::Collinear { intersection } if intersection.start == intersection.end => continue,
            LineIntersection::Collinear { intersection } => intersection.start,
        };
        // Neighbours meet in their common corner; rounding may call that a proper crossing.
        let neighbours = a.ring == b.ring && (a.at.abs_diff(b.at) == 1 || a.at.abs_diff(b.at) == a.last);
        if neighbours && matches!(meeting, LineIntersection::SinglePoint { .. }) {
            continue;
        }
        let at = turn(at);
        return Err(flaw(
            "ring_crosses_itself",
            format!("the outline crosses itself near {:.6}, {:.6}", at.x, at.y),
            "rings that do not cross",
            "repair the outline in a map editor and export it again",
        ));
    }
    Ok(())
}

/// The polygons of a Polygon or MultiPolygon, checked and cut at the antimeridian.
pub(crate) fn area(value: &GeometryValue, wanted: &str) -> Result<MultiPolygon<f64>, Flaw> {
    let one;
    let members: &[Vec<Vec<RawPosition>>] = match value {
        GeometryValue::Polygon { coordinates } => {
            one = [coordinates.clone()];
            &one
        }
        GeometryValue::MultiPolygon { coordinates } => coordinates,
        other => return Err(wrong_kind(other, wanted)),
    };
    let mut polygons = Vec::new();
    for member in members {
        polygons.extend(cut(polygon(member)?));
    }
    Ok(MultiPolygon::new(polygons))
}

/// Cuts a polygon that reaches past 180 degrees into its western and eastern parts.
fn cut(polygon: Polygon<f64>) -> Vec<Polygon<f64>> {
    if polygon.exterior().coords().all(|c| c.x <= 180.0) {
        return vec![polygon];
    }
    let half = |from: f64| Rect::new(Coord { x: from, y: -90.0 }, Coord { x: from + 180.0, y: 90.0 }).to_polygon();
    let before = polygon.intersection(&half(0.0));
    let after = polygon.intersection(&half(180.0)).map_coords(|c| Coord { x: c.x - 360.0, y: c.y });
    let parts = before.into_iter().chain(after).map(|p| p.orient(geo::orient::Direction::Default));
    parts.filter(|p| p.unsigned_area() > 0.0).collect()
}

/// Where a record stands: its point, or the interior point of its footprint.
pub(crate) fn standpoint(value: &GeometryValue, wanted: &str) -> Result<Position, Flaw> {
    let rings = match value {
        GeometryValue::Point { coordinates } => return position(coordinates),
        GeometryValue::MultiPoint { coordinates } if coordinates.len() == 1 => return position(&coordinates[0]),
        GeometryValue::Polygon { coordinates } => coordinates,
        GeometryValue::MultiPolygon { coordinates } if coordinates.len() == 1 => &coordinates[0],
        other => return Err(wrong_kind(other, wanted)),
    };
    let inside = polygon(rings)?.interior_point().ok_or_else(|| {
        flaw("ring_without_area", "the footprint encloses no area", wanted, "draw it again or give a point")
    })?;
    // A footprint's height is the mean of its corners', when every corner has one.
    let corners = &rings[0][..rings[0].len() - 1];
    let heights = corners.iter().map(|p| position(p).map(|p| p.height_m)).collect::<Result<Vec<_>, _>>()?;
    let heights: Vec<f64> = heights.into_iter().flatten().collect();
    let height_m = (heights.len() == corners.len()).then(|| heights.iter().sum::<f64>() / heights.len() as f64);
    let lon_deg = if inside.x() > 180.0 { inside.x() - 360.0 } else { inside.x() };
    Ok(Position { lon_deg, lat_deg: inside.y(), height_m })
}

/// The parts of a LineString or MultiLineString, heights kept.
pub(crate) fn lines(value: &GeometryValue, wanted: &str) -> Result<Vec<Vec<Position>>, Flaw> {
    let parts: Vec<&[RawPosition]> = match value {
        GeometryValue::LineString { coordinates } => vec![coordinates],
        GeometryValue::MultiLineString { coordinates } => coordinates.iter().map(Vec::as_slice).collect(),
        other => return Err(wrong_kind(other, wanted)),
    };
    let mut lines = Vec::new();
    for part in parts {
        let mut line = part.iter().map(position).collect::<Result<Vec<_>, _>>()?;
        line.dedup_by(|b, a| a.lon_deg == b.lon_deg && a.lat_deg == b.lat_deg);
        if line.len() < 2 {
            return Err(flaw(
                "line_too_short",
                "a line has fewer than two different positions",
                "two or more",
                "complete the line or remove that part",
            ));
        }
        lines.push(line);
    }
    Ok(lines)
}

fn wrong_kind(value: &GeometryValue, wanted: &str) -> Flaw {
    flaw("geometry_kind", format!("the geometry is a {}", value.type_name()), wanted, "split or convert the geometry")
}
