//! Nodes from the face inward.
//!
//! z(s) = L sinh(b s) / sinh(b),  s = i/(n-1),  i = 0 .. n-1
//!
//! Node 0 lies on the face; control volumes reach half-way to the neighbours. Because the spacing is a smooth function of
//! the index, central differences on it are of second order. L is each draw's own depth, b is common to the batch.
//! For a face of curvature C = 1/R the area at depth z is A = (1 - C z)^2 of the face's; for a plane C = 0.

use crate::numerics::lanes::Lanes;

/// A graded grid for eight draws. Lengths in m; everything is per unit area of face.
#[derive(Debug, Clone)]
pub struct Grid {
    /// Depth of each node, `[n]`, face first.
    pub depth_m: Vec<Lanes>,
    /// Control volume of each node per unit area of face, m, `[n]`.
    pub volume_m: Vec<Lanes>,
    /// Area over distance between node i and i + 1, per unit area of face, 1/m, `[n - 1]`.
    pub area_over_distance_per_m: Vec<Lanes>,
    /// Curvature of the face, 1/m; 0 is a plane.
    pub curvature_per_m: Lanes,
}

impl Grid {
    /// A grid of `n` nodes to `depth_m`, stretched by `stretch` (above 0; 6 makes the last spacing 200 times the first).
    ///
    /// # Panics
    /// With fewer than three nodes, or a depth beyond the centre of a sphere.
    pub fn new(n: usize, depth_m: Lanes, stretch: f64, curvature_per_m: Lanes) -> Grid {
        assert!(n >= 3, "a grid needs three nodes");
        for l in 0..crate::numerics::lanes::LANES {
            assert!(depth_m.0[l] * curvature_per_m.0[l] <= 1.0 + 1e-12, "a grid ends at the centre of the sphere");
        }
        let mut grid = Grid {
            depth_m: vec![Lanes::ZERO; n],
            volume_m: vec![Lanes::ZERO; n],
            area_over_distance_per_m: vec![Lanes::ZERO; n - 1],
            curvature_per_m,
        };
        let whole = libm::sinh(stretch);
        for i in 0..n {
            grid.depth_m[i] = depth_m * (libm::sinh(stretch * i as f64 / (n - 1) as f64) / whole);
        }
        let third = curvature_per_m * curvature_per_m / 3.0;
        // Integral of (1 - C z)^2 from the face to z.
        let inner = |z: Lanes| z - curvature_per_m * z * z + third * z * z * z;
        let mut above = Lanes::ZERO;
        for i in 0..n {
            let below = if i + 1 < n {
                let middle = (grid.depth_m[i] + grid.depth_m[i + 1]) * 0.5;
                let side = Lanes::ONE - curvature_per_m * middle;
                grid.area_over_distance_per_m[i] = side * side / (grid.depth_m[i + 1] - grid.depth_m[i]);
                inner(middle)
            } else {
                inner(grid.depth_m[i])
            };
            grid.volume_m[i] = below - above;
            above = below;
        }
        grid
    }

    /// Number of nodes.
    pub fn len(&self) -> usize {
        self.depth_m.len()
    }

    /// Never true: a grid has three nodes at least.
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
        // A whole sphere of radius R has a third of R as volume per unit area of its surface.
        let sphere = Grid::new(20, Lanes::splat(0.25), 3.0, Lanes::splat(4.0));
        let total: f64 = sphere.volume_m.iter().map(|v| v.0[7]).sum();
        assert!((total - 0.25 / 3.0).abs() < 1e-14);
    }
}
