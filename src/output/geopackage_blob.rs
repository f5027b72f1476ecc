//! Geometries as GeoPackage blobs: the header of the standard (2.1.3), then ISO well-known binary, little-endian.

use geo::{LineString, MultiPolygon};
use geojson::Position as Corner;

use crate::site::Position;

/// WGS 84, degrees.
pub(super) const SRS_ID: i32 = 4326;

/// A geometry of a layer.
pub(super) enum Shape<'a> {
    /// Longitude, latitude, height.
    Point(f64, f64, Option<f64>),
    /// A footprint as it came: rings of closed corners; it has heights when each corner has one.
    Footprint(&'a [Vec<Corner>]),
    /// A line; it has heights when each of its points has one.
    Line(&'a [Position]),
    /// Areas.
    Areas(&'a MultiPolygon<f64>),
}

/// A box in degrees.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Extent {
    pub(super) min_x: f64,
    pub(super) max_x: f64,
    pub(super) min_y: f64,
    pub(super) max_y: f64,
}

impl Extent {
    /// The box of nothing.
    pub(super) const NOTHING: Extent =
        Extent { min_x: f64::INFINITY, max_x: f64::NEG_INFINITY, min_y: f64::INFINITY, max_y: f64::NEG_INFINITY };

    /// The box of both.
    pub(super) fn with(self, other: Extent) -> Extent {
        Extent {
            min_x: self.min_x.min(other.min_x),
            max_x: self.max_x.max(other.max_x),
            min_y: self.min_y.min(other.min_y),
            max_y: self.max_y.max(other.max_y),
        }
    }

    /// The box of all points, or of nothing where a number is not finite.
    fn of(mut points: impl Iterator<Item = (f64, f64)>) -> Extent {
        let whole = points.try_fold(Extent::NOTHING, |e, (x, y)| {
            let finite = x.is_finite() && y.is_finite();
            finite.then(|| e.with(Extent { min_x: x, max_x: x, min_y: y, max_y: y }))
        });
        whole.unwrap_or(Extent::NOTHING)
    }

    /// Whether it holds anything.
    pub(super) fn some(&self) -> bool {
        self.min_x <= self.max_x
    }
}

/// A geometry as it is stored, and its box.
pub(super) struct Blob {
    pub(super) bytes: Vec<u8>,
    pub(super) extent: Extent,
}

const POINT: u32 = 1;
const LINE: u32 = 2;
const POLYGON: u32 = 3;
const MULTI_POLYGON: u32 = 6;
/// What ISO adds to a type with heights.
const WITH_HEIGHTS: u32 = 1000;
/// Header flags: little-endian, no box, or the box of longitude and latitude.
const FLAGS_PLAIN: u8 = 0b0000_0001;
const FLAGS_BOX: u8 = 0b0000_0011;

/// Encodes a geometry; `None` for one that holds nothing or a number that is not finite.
pub(super) fn encode(shape: &Shape<'_>) -> Option<Blob> {
    let extent = match shape {
        Shape::Point(x, y, _) => Extent::of([(*x, *y)].into_iter()),
        Shape::Footprint(rings) => Extent::of(rings.iter().flatten().map(|c| (number(c, 0), number(c, 1)))),
        Shape::Line(points) => Extent::of(points.iter().map(|p| (p.lon_deg, p.lat_deg))),
        Shape::Areas(areas) => Extent::of(areas.iter().flat_map(|a| a.exterior().coords().map(|c| (c.x, c.y)))),
    };
    if !extent.some() {
        return None;
    }
    let mut bytes = b"GP\0".to_vec();
    if matches!(shape, Shape::Point(..)) {
        bytes.push(FLAGS_PLAIN);
        bytes.extend(SRS_ID.to_le_bytes());
    } else {
        bytes.push(FLAGS_BOX);
        bytes.extend(SRS_ID.to_le_bytes());
        numbers(&mut bytes, &[extent.min_x, extent.max_x, extent.min_y, extent.max_y]);
    }
    match shape {
        Shape::Point(x, y, None) => {
            kind(&mut bytes, POINT);
            numbers(&mut bytes, &[*x, *y]);
        }
        Shape::Point(x, y, Some(height)) => {
            kind(&mut bytes, POINT + WITH_HEIGHTS);
            numbers(&mut bytes, &[*x, *y, *height]);
        }
        Shape::Footprint(rings) => {
            let heights = rings.iter().flatten().all(|c| number(c, 2).is_finite());
            kind(&mut bytes, POLYGON + if heights { WITH_HEIGHTS } else { 0 });
            count(&mut bytes, rings.len());
            for ring in *rings {
                count(&mut bytes, ring.len());
                let dimensions = if heights { 3 } else { 2 };
                ring.iter().for_each(|c| numbers(&mut bytes, &c.as_slice()[..dimensions]));
            }
        }
        Shape::Line(points) => {
            let heights = points.iter().all(|p| p.height_m.is_some());
            kind(&mut bytes, LINE + if heights { WITH_HEIGHTS } else { 0 });
            count(&mut bytes, points.len());
            for p in *points {
                numbers(&mut bytes, &[p.lon_deg, p.lat_deg]);
                if let (true, Some(height)) = (heights, p.height_m) {
                    numbers(&mut bytes, &[height]);
                }
            }
        }
        Shape::Areas(areas) => {
            kind(&mut bytes, MULTI_POLYGON);
            count(&mut bytes, areas.0.len());
            for area in areas.iter() {
                kind(&mut bytes, POLYGON);
                count(&mut bytes, 1 + area.interiors().len());
                ring(&mut bytes, area.exterior());
                area.interiors().iter().for_each(|hole| ring(&mut bytes, hole));
            }
        }
    }
    Some(Blob { bytes, extent })
}

/// One number of a position; not a number where it has none.
fn number(corner: &Corner, i: usize) -> f64 {
    corner.as_slice().get(i).copied().unwrap_or(f64::NAN)
}

fn kind(bytes: &mut Vec<u8>, kind: u32) {
    bytes.push(1);
    bytes.extend(kind.to_le_bytes());
}

fn count(bytes: &mut Vec<u8>, count: usize) {
    bytes.extend((count as u32).to_le_bytes());
}

fn numbers(bytes: &mut Vec<u8>, numbers: &[f64]) {
    numbers.iter().for_each(|x| bytes.extend(x.to_le_bytes()));
}

fn ring(bytes: &mut Vec<u8>, ring: &LineString<f64>) {
    count(bytes, ring.0.len());
    ring.coords().for_each(|c| numbers(bytes, &[c.x, c.y]));
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_point_is_the_header_and_21_bytes() {
        // By hand from 2.1.3 of the standard and ISO 13249-3: "GP", version 0, flags 1, 4326, then 01, type 1, x, y.
        let blob = encode(&Shape::Point(1.0, -2.0, None)).expect("a point");
        let mut expected = vec![0x47, 0x50, 0, 1, 0xE6, 0x10, 0, 0, 1, 1, 0, 0, 0];
        expected.extend([0, 0, 0, 0, 0, 0, 0xF0, 0x3F, 0, 0, 0, 0, 0, 0, 0, 0xC0]);
        assert_eq!(blob.bytes, expected);
        assert_eq!(encode(&Shape::Point(1.0, -2.0, Some(7.0))).expect("a point").bytes[9..13], 1001_u32.to_le_bytes());
        assert!(encode(&Shape::Point(f64::NAN, 0.0, None)).is_none());
        let line = |lons: [f64; 3]| lons.map(|lon_deg| Position { lon_deg, lat_deg: 0.0, height_m: None });
        assert!(encode(&Shape::Line(&line([0.0, 1.0, 2.0]))).is_some());
        for at in 0..3 {
            let mut lons = [0.0, 1.0, 2.0];
            lons[at] = f64::NAN;
            assert!(encode(&Shape::Line(&line(lons))).is_none(), "not a number at {at}");
        }
        assert!(encode(&Shape::Line(&[])).is_none());
    }

    #[test]
    fn a_footprint_is_a_polygon_with_heights_where_every_corner_has_one() {
        let corner = |x: f64, y: f64| Corner::from([x, y, 9.0]);
        let mut rings = vec![vec![corner(0.0, 0.0), corner(1.0, 0.0), corner(0.0, 1.0), corner(0.0, 0.0)]];
        // By hand: header of 8 bytes, box of 32, then 01, type 1003, one ring of four corners with three numbers each.
        let blob = encode(&Shape::Footprint(&rings)).expect("a polygon");
        assert_eq!(blob.bytes.len(), 8 + 32 + 5 + 4 + 4 + 4 * 24);
        assert_eq!(blob.bytes[41..45], 1003_u32.to_le_bytes());
        rings[0][2] = Corner::from([0.0, 1.0]);
        let blob = encode(&Shape::Footprint(&rings)).expect("a polygon");
        assert_eq!(blob.bytes.len(), 8 + 32 + 5 + 4 + 4 + 4 * 16);
        assert_eq!(blob.bytes[41..45], 3_u32.to_le_bytes());
    }
}
