//! Which burns cover a place.
//!
//! Interiors are found by an interval tree over each perimeter's edges, so that a ring of twenty thousand vertices costs
//! a logarithm; a place on the edge counts as covered and is told apart by an index of the edges themselves.

use geo::indexed::IntervalTreeMultiPolygon;
use geo::{Contains, Coord, Intersects, Line, LinesIter};
use rstar::{AABB, RTree, RTreeObject};

use crate::site::{Burn, Position};

/// A perimeter's edge in the index.
struct Edge(Line<f64>);

impl RTreeObject for Edge {
    type Envelope = AABB<[f64; 2]>;

    fn envelope(&self) -> Self::Envelope {
        AABB::from_corners([self.0.start.x, self.0.start.y], [self.0.end.x, self.0.end.y])
    }
}

struct Indexed {
    interior: IntervalTreeMultiPolygon<f64>,
    edges: RTree<Edge>,
}

/// How a burn covers a place.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Cover {
    /// Well inside.
    Inside,
    /// On the perimeter.
    Edge,
}

/// The burns of a run, indexed.
pub struct Burned<'a> {
    burns: &'a [Burn],
    indexed: Vec<Indexed>,
}

impl<'a> Burned<'a> {
    /// Indexes the burns.
    pub fn new(burns: &'a [Burn]) -> Burned<'a> {
        let indexed = burns
            .iter()
            .map(|b| Indexed {
                interior: IntervalTreeMultiPolygon::new(&b.area),
                edges: RTree::bulk_load(b.area.lines_iter().map(Edge).collect()),
            })
            .collect();
        Burned { burns, indexed }
    }

    /// The burns that cover a place, in the order of the file.
    pub fn at(&self, place: &Position) -> Vec<(&'a Burn, Cover)> {
        let twins = [place.lon_deg, -place.lon_deg];
        // The two names of the antimeridian are one place.
        let names = if place.lon_deg.abs() == 180.0 { &twins[..] } else { &twins[..1] };
        let mut found = Vec::new();
        for (burn, indexed) in self.burns.iter().zip(&self.indexed) {
            let cover = names.iter().find_map(|lon| {
                let here = Coord { x: *lon, y: place.lat_deg };
                if indexed.interior.contains(&here) {
                    return Some(Cover::Inside);
                }
                let point = AABB::from_point([here.x, here.y]);
                let touched = indexed.edges.locate_in_envelope_intersecting(point).any(|e| e.0.intersects(&here));
                touched.then_some(Cover::Edge)
            });
            found.extend(cover.map(|c| (burn, c)));
        }
        found
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use geo::{MultiPolygon, polygon};

    #[test]
    fn inside_hole_edge_outside() {
        let square = polygon!(exterior: [(x: 0., y: 0.), (x: 4., y: 0.), (x: 4., y: 4.), (x: 0., y: 4.)],
            interiors: [[(x: 1., y: 1.), (x: 1., y: 2.), (x: 2., y: 2.), (x: 2., y: 1.)]]);
        let burn = Burn {
            id: "b".into(),
            area: MultiPolygon(vec![square]),
            residence_s: None,
            residence_gsd: None,
            exposure: None,
            fireline_intensity_w_m: None,
            flame_length_m: None,
            spread_rate_m_s: None,
            fuel_load_kg_m2: None,
            burned_on: None,
            ground_after: None,
        };
        let burns = [burn];
        let burned = Burned::new(&burns);
        let at = |x: f64, y: f64| burned.at(&Position { lon_deg: x, lat_deg: y, height_m: None }).first().map(|c| c.1);
        assert_eq!(at(3.0, 3.0), Some(Cover::Inside));
        assert_eq!(at(1.5, 1.5), None);
        assert_eq!(at(4.0, 2.0), Some(Cover::Edge));
        assert_eq!(at(1.0, 1.5), Some(Cover::Edge));
        assert_eq!(at(5.0, 2.0), None);
    }
}
