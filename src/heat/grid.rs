//! Nodes from the face inward, and the weights with which they store and pass on heat.
//!
//! z(s) = L sinh(b s) / sinh(b),  s = i/(n-1),  i = 0 .. n-1
//!
//! Node 0 lies on the face; control volumes reach half-way to the neighbours. Because the spacing is a smooth function of
//! the index, differences on it keep their order. L is each draw's own depth, b is common to the batch. For a face of
//! curvature C = 1/R the area at depth z is A = (1 - C z)^2 of the face's; for a plane C = 0.
//!
//! Midpoint fluxes and lumped volumes V_i are exact where the heating rate r = dv/dt is uniform. What a rate that varies
//! with depth adds is spread over the neighbours, which lifts the scheme to fourth order inside (derived by expanding r
//! about node and midpoint, with D+ and D- its slopes to either side and d+ and d- those distances):
//!
//! M r = V_i r_i + D+ (p+ + A d+^2/24 - K_i) - D- (p- + A d-^2/24 - K_i),   K_i = A_i (d+^2 - d+ d- + d-^2)/12
//!
//! p+ and p- are the first moments of A about the node over the half cells, A d^2/24 the part of the flux at the midpoint
//! that a varying rate makes, K_i the curvature of r. The face row leaves the curvature out: third order in a cell that is
//! thin, while at the end symmetry stands in for the missing neighbour. M is tridiagonal as conduction itself is.

use crate::numerics::lanes::Lanes;

/// A graded grid for eight draws. Lengths in m; everything is per unit area of face.
#[derive(Debug, Clone)]
pub struct Grid {
    /// Depth of each node, `[n]`, face first.
    pub depth_m: Vec<Lanes>,
    /// Rows of M, `[n]`, m.
    pub storage_m: Vec<Storage>,
    /// Weight of each node in the heat of the column, the column sums of M, m, `[n]`.
    pub volume_m: Vec<Lanes>,
    /// Area over distance between node i and i + 1, per unit area of face, 1/m, `[n - 1]`.
    pub area_over_distance_per_m: Vec<Lanes>,
    /// Curvature of the face, 1/m; 0 is a plane.
    pub curvature_per_m: Lanes,
    /// dz/di at each node, m, `[n]`: in the index, which all is smooth in, a sum is an integral.
    pub depth_per_index_m: Vec<Lanes>,
    /// L / sinh b, m, and b / (n - 1).
    scale_m: Lanes,
    per_index: f64,
}

/// What the ends of a sum over the index add: weights of the first and last nodes (Gregory's, to the second difference).
const END_WEIGHTS: [f64; 3] = [3.0 / 8.0, 7.0 / 6.0, 23.0 / 24.0];

/// A row of M: what the heating rates of a node and of its neighbours store in its control volume, m.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Storage {
    /// Of the neighbour towards the face.
    pub above: Lanes,
    /// Of the node.
    pub here: Lanes,
    /// Of the neighbour away from the face.
    pub below: Lanes,
}

impl Grid {
    /// A grid of `n` nodes to `depth_m`, stretched by `stretch` (above 0; 6 makes the last spacing 200 times the first).
    ///
    /// # Panics
    /// With fewer than six nodes, or a depth beyond the centre of a sphere.
    pub fn new(n: usize, depth_m: Lanes, stretch: f64, curvature_per_m: Lanes) -> Grid {
        assert!(n >= 6, "a grid needs six nodes");
        for l in 0..crate::numerics::lanes::LANES {
            assert!(depth_m.0[l] * curvature_per_m.0[l] <= 1.0 + 1e-12, "a grid ends at the centre of the sphere");
        }
        let per_index = stretch / (n - 1) as f64;
        let scale_m = depth_m / libm::sinh(stretch);
        let depth_m: Vec<Lanes> = (0..n).map(|i| scale_m * libm::sinh(per_index * i as f64)).collect();
        let depth_per_index_m = (0..n).map(|i| scale_m * (per_index * libm::cosh(per_index * i as f64))).collect();
        let side = |z: Lanes| Lanes::ONE - curvature_per_m * z;
        let third = curvature_per_m * curvature_per_m / 3.0;
        // Integral of (1 - C z)^2 from the face to z.
        let inner = |z: Lanes| z - curvature_per_m * z * z + third * z * z * z;
        // First moment of (1 - C z)^2 about `z` over a half cell that reaches `h` inward, or outward where h is negative.
        let moment = |z: Lanes, h: Lanes| {
            let s = side(z);
            h * h
                * (s * s * 0.5 - s * curvature_per_m * h * (2.0 / 3.0)
                    + curvature_per_m * curvature_per_m * h * h * 0.25)
        };
        let zero = Lanes::ZERO;
        let mut storage_m = vec![Storage { above: zero, here: zero, below: zero }; n];
        let mut area_over_distance_per_m = Vec::with_capacity(n - 1);
        let mut above = zero;
        for i in 0..n {
            let z = depth_m[i];
            let area = side(z) * side(z);
            let before = (i > 0).then(|| z - depth_m[i - 1]);
            let after = (i + 1 < n).then(|| depth_m[i + 1] - z);
            let curved = match (before, after) {
                (Some(b), Some(a)) => area * (a * a - a * b + b * b) / 12.0,
                (Some(b), None) => area * b * b / 12.0,
                _ => zero,
            };
            let mut row = Storage { above: zero, here: zero, below: zero };
            let mut end = z;
            if let Some(d) = after {
                let middle = z + d * 0.5;
                let area = side(middle) * side(middle);
                area_over_distance_per_m.push(area / d);
                row.below = (moment(z, d * 0.5) + area * d * d / 24.0 - curved) / d;
                end = middle;
            }
            if let Some(d) = before {
                let middle = z - d * 0.5;
                let area = side(middle) * side(middle);
                row.above = (moment(z, d * -0.5) + area * d * d / 24.0 - curved) / d;
            }
            row.here = inner(end) - above - row.above - row.below;
            above = inner(end);
            storage_m[i] = row;
        }
        let volume_m = (0..n)
            .map(|i| {
                let mut sum = storage_m[i].here;
                if i > 0 {
                    sum += storage_m[i - 1].below;
                }
                if i + 1 < n {
                    sum += storage_m[i + 1].above;
                }
                sum
            })
            .collect();
        Grid {
            depth_m,
            storage_m,
            volume_m,
            area_over_distance_per_m,
            curvature_per_m,
            depth_per_index_m,
            scale_m,
            per_index,
        }
    }

    /// Weight of node `i` in the integral of a nodal array over depth, m; of fourth order.
    #[inline(always)]
    pub fn weight_m(&self, i: usize) -> Lanes {
        let from_end = i.min(self.len() - 1 - i);
        self.depth_per_index_m[i] * *END_WEIGHTS.get(from_end).unwrap_or(&1.0)
    }

    /// Broken index of a depth of one lane.
    pub fn index_at(&self, lane: usize, depth_m: f64) -> f64 {
        (libm::asinh(depth_m / self.scale_m.0[lane]) / self.per_index).min((self.len() - 1) as f64)
    }

    /// Depth of one lane at a broken index, m.
    pub fn depth_at(&self, lane: usize, index: f64) -> f64 {
        self.scale_m.0[lane] * libm::sinh(self.per_index * index)
    }

    /// Number of nodes.
    pub fn len(&self) -> usize {
        self.depth_m.len()
    }

    /// Never true: a grid has six nodes at least.
    pub fn is_empty(&self) -> bool {
        self.depth_m.is_empty()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn volumes_add_up_to_the_body() {
        let plane = Grid::new(20, Lanes::splat(0.3), 5.0, Lanes::ZERO);
        let total: f64 = plane.volume_m.iter().map(|v| v.0[0]).sum();
        assert!((total - 0.3).abs() < 1e-14);
        let total: f64 = (0..20).map(|i| plane.weight_m(i).0[0]).sum();
        assert!((total - 0.3).abs() < 1e-4);
        assert!((plane.depth_at(2, plane.index_at(2, 0.07)) - 0.07).abs() < 1e-15);
        // A whole sphere of radius R has a third of R as volume per unit area of its surface.
        let sphere = Grid::new(20, Lanes::splat(0.25), 3.0, Lanes::splat(4.0));
        let total: f64 = sphere.volume_m.iter().map(|v| v.0[7]).sum();
        assert!((total - 0.25 / 3.0).abs() < 1e-14);
    }
}
