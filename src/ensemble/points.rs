//! One scrambled low-discrepancy point set per run, the same for every boulder.
//!
//! Points are Owen-scrambled Sobol points (Burley 2020, crate `sobol_burley`), in [`Settings::REPLICATES`] independent
//! scrambles of equal size: replicate r holds draws r n/R .. (r + 1) n/R. The spread of the replicates' means gives the
//! sampling error. Each uncertain input owns one dimension, named in [`Dimension`]; a dimension is never shared, so a
//! new input takes a new dimension at the end and leaves every other number as it was.

use crate::settings::Settings;

macro_rules! dimensions {
    ($($(#[doc = $doc:literal])+ $name:ident),+ $(,)?) => {
        /// What each coordinate of a point decides.
        #[derive(Debug, Clone, Copy, PartialEq, Eq)]
        pub enum Dimension { $($(#[doc = $doc])+ $name),+ }
        impl Dimension {
            /// Every dimension, in order.
            pub const ALL: &'static [Dimension] = &[$(Dimension::$name),+];
        }
    };
}

dimensions! {
    /// Incident irradiance.
    Irradiance,
    /// Residence time.
    Residence,
    /// Tensile strength.
    TensileStrength,
    /// Heated share of the surface.
    HeatedShare,
    /// Thermal diffusivity.
    Diffusivity,
    /// Expansion.
    Expansion,
    /// Young's modulus.
    YoungsModulus,
    /// Which strength limits slabs.
    StrengthBranch,
    /// Which stiffness the hot rock has.
    StiffnessBranch,
    /// Compressive strength.
    CompressiveStrength,
    /// Gas temperature.
    Gas,
    /// Decay time.
    Decay,
    /// Which rock of a mixture.
    Rock,
    /// Which class of a mixture.
    Class,
    /// Share of the surface that can flake.
    FlakableShare,
    /// Whether slab plates leave.
    PlateLeaves,
    /// Scatter of slab depth.
    SlabDepth,
    /// Slabbed share of the heated face.
    SlabShare,
    /// Density.
    Density,
    /// Specific heat.
    SpecificHeat,
    /// Convective coefficient.
    Convection,
    /// Emissivity.
    Emissivity,
    /// Ambient temperature.
    Ambient,
    /// Poisson's ratio.
    PoissonsRatio,
    /// Fracture toughness.
    FractureToughness,
    /// Flaw coefficient of flakes.
    FlawCoefficient,
    /// Size exponent of tensile strength.
    SizeModulus,
    /// Breadth of a plate over its depth.
    PlateBreadth,
    /// Slab depth under a governing patch.
    PatchDepth,
    /// Width of a log's patch over the log's diameter.
    PatchWidth,
    /// Debonded radius of a rind over its thickness.
    RindSlenderness,
    /// Strength of the rind's plane.
    RindPlane,
    /// Porosity.
    Porosity,
    /// Flame temperature where the spread rate gives the flame depth.
    FlameTemperature,
    /// Residence of a second stage along a log.
    LogResidence,
    /// Weibull modulus of tensile strength.
    WeibullModulus,
}

/// The points of a run.
#[derive(Debug, Clone)]
pub struct PointSet {
    draws: usize,
    coordinates: Vec<Vec<f64>>,
}

/// Half the spacing of the points' last binary digit, added so that no coordinate is 0.
const HALF_DIGIT: f64 = 1.0 / (1u64 << 25) as f64;

impl PointSet {
    /// Points for `draws` draws, a multiple of the replicates.
    ///
    /// # Panics
    /// If it is not one, or beyond [`Settings::DRAWS_MAX`].
    pub fn new(draws: usize, seed: u64) -> PointSet {
        assert!(draws.is_multiple_of(Settings::REPLICATES), "draws come in whole replicates");
        assert!(draws <= Settings::DRAWS_MAX, "the point set is defined for {} draws at most", Settings::DRAWS_MAX);
        let each = draws / Settings::REPLICATES;
        let coordinates = (0..Dimension::ALL.len() as u32)
            .map(|dimension| {
                (0..draws)
                    .map(|j| {
                        let (replicate, index) = (j / each, j % each);
                        let scramble = mix(seed, replicate as u64);
                        f64::from(sobol_burley::sample(index as u32, dimension, scramble)) + HALF_DIGIT
                    })
                    .collect()
            })
            .collect();
        PointSet { draws, coordinates }
    }

    /// Number of draws.
    pub fn draws(&self) -> usize {
        self.draws
    }

    /// Coordinates of one dimension, `[draws]`, each in (0, 1).
    pub fn of(&self, dimension: Dimension) -> &[f64] {
        &self.coordinates[dimension as usize]
    }

    /// The same points with one coordinate held at the share `u` in (0, 1) in every draw.
    pub fn pinned(&self, dimension: Dimension, u: f64) -> PointSet {
        let mut points = self.clone();
        points.coordinates[dimension as usize].fill(u);
        points
    }

    /// Means of a quantity over each replicate; `values` is `[draws]`.
    pub fn replicate_means(&self, values: &[f64]) -> Vec<f64> {
        let each = self.draws / Settings::REPLICATES;
        values.chunks(each).map(|c| c.iter().sum::<f64>() / c.len() as f64).collect()
    }
}

/// A 32-bit scramble from the run's seed and a replicate (the finaliser of SplitMix64, Steele, Lea & Flood 2014, recalled).
fn mix(seed: u64, replicate: u64) -> u32 {
    let mut z = seed.wrapping_add((replicate + 1).wrapping_mul(0x9E37_79B9_7F4A_7C15));
    z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    (z ^ (z >> 31)) as u32
}

/// Index of the share that `u` falls in; `shares` sum to one.
///
/// ```
/// use spallcast::ensemble::points::pick;
/// assert_eq!(pick(0.1, [0.3, 0.5, 0.2]), 0);
/// assert_eq!(pick(0.99, [0.3, 0.5, 0.2]), 2);
/// ```
pub fn pick(u: f64, shares: impl IntoIterator<Item = f64>) -> usize {
    let mut below = 0.0;
    let mut last = 0;
    for (i, share) in shares.into_iter().enumerate() {
        below += share;
        last = i;
        if u < below {
            return i;
        }
    }
    last
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_replicate_is_stratified_in_every_dimension() {
        // A (0, m, s)-net in base 2: each of the n equal intervals holds one of n points, in each dimension.
        let points = PointSet::new(512, 7);
        let each = 512 / Settings::REPLICATES;
        for dimension in Dimension::ALL {
            for replicate in points.of(*dimension).chunks(each) {
                let mut seen = vec![0; each];
                replicate.iter().for_each(|u| seen[(u * each as f64) as usize] += 1);
                assert!(seen.iter().all(|c| *c == 1), "{dimension:?}: {seen:?}");
            }
        }
    }

    #[test]
    fn seeds_and_replicates_differ() {
        let a = PointSet::new(64, 1);
        let b = PointSet::new(64, 2);
        assert_ne!(a.of(Dimension::Gas), b.of(Dimension::Gas));
        assert_ne!(a.of(Dimension::Gas)[..4], a.of(Dimension::Gas)[4..8]);
    }
}
