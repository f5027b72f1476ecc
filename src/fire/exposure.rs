//! The eight exposure classes: what kind of fire a boulder stood in, and the distributions of its history.
//!
//! The table `tables/exposure_classes.csv` is embedded: lognormal by median and geometric standard deviation, normal for
//! the gas temperature, each clipped to its bounds. Centres of residence for grass, forest and crown rest on measured
//! means (published); flux centres on measured peaks divided by 1.5 to 2 (judgement); every spread is judgement.

use crate::ensemble::distribution::{Distribution, Shape};
use crate::site::{Kind, word_enum};
use crate::units::{ICE_POINT_K, STEFAN_BOLTZMANN_W_M2_K4, W_PER_KW};

word_enum! {
    /// Kind of fire at a boulder, in rising order of dose.
    ExposureClass {
        /// Sparse litter, low flames.
        LightSurface = "light_surface",
        /// Cured grass.
        Grass = "grass",
        /// Shrubs and sagebrush.
        Shrub = "shrub",
        /// Surface fire under trees.
        ForestSurface = "forest_surface",
        /// Crown fire.
        Crown = "crown",
        /// Piles of large dead wood nearby.
        HeavyDeadWood = "heavy_dead_wood",
        /// A log or stump burning against the rock.
        LogContact = "log_contact",
        /// Duff or rotten wood smouldering against the rock.
        SmoulderingContact = "smouldering_contact",
    }
}

/// Distributions of one class, SI.
#[derive(Debug, Clone, PartialEq)]
pub struct ClassFigures {
    /// Residence time, s.
    pub residence_s: Distribution,
    /// Incident irradiance of the plateau, W/m2; `None` where the irradiance is that of a black body at the gas temperature.
    pub irradiance_w_m2: Option<Distribution>,
    /// Gas temperature, K.
    pub gas_k: Distribution,
    /// Convective coefficient, W/m2K.
    pub h_w_m2_k: Distribution,
    /// Decay time after the residence, s.
    pub decay_s: Distribution,
    /// Heated share of the surface, triangular (assumption).
    pub heated_fraction: Distribution,
}

const TABLE: &str = include_str!("tables/exposure_classes.csv");

impl ExposureClass {
    /// Log or smouldering contact: heats a patch, not a face that looks into flames.
    pub fn is_contact(self) -> bool {
        matches!(self, ExposureClass::LogContact | ExposureClass::SmoulderingContact)
    }

    /// The class's distributions, from the embedded table.
    ///
    /// # Panics
    /// If the embedded table is broken, which a test rules out.
    pub fn figures(self) -> ClassFigures {
        let mut reader = csv::Reader::from_reader(TABLE.as_bytes());
        let headers = reader.headers().expect("embedded class table has a header").clone();
        let row = reader
            .records()
            .map(|r| r.expect("embedded class table is well formed"))
            .find(|r| r.get(0) == Some(self.word()))
            .unwrap_or_else(|| panic!("embedded class table lacks {}", self.word()));
        let cell = |name: &str| -> Option<f64> {
            let column = headers.iter().position(|h| h == name).unwrap_or_else(|| panic!("class table lacks {name}"));
            let text = row.get(column).unwrap_or("");
            if text.is_empty() { None } else { Some(text.parse().expect("embedded class table holds numbers")) }
        };
        let need = |name: &str| cell(name).unwrap_or_else(|| panic!("class table: {name} empty"));
        let lognormal = |median: &str, gsd: &str, lower: &str, upper: &str, unit: f64| Distribution {
            shape: Shape::Lognormal,
            centre: need(median) * unit,
            spread: libm::log(need(gsd)),
            lower: need(lower) * unit,
            upper: need(upper) * unit,
        };
        ClassFigures {
            residence_s: lognormal("residence_s_median", "residence_gsd", "residence_min_s", "residence_max_s", 1.0),
            irradiance_w_m2: cell("flux_kw_m2_median")
                .map(|_| lognormal("flux_kw_m2_median", "flux_gsd", "flux_min", "flux_max", W_PER_KW)),
            gas_k: Distribution {
                shape: Shape::Normal,
                centre: need("gas_c_mean") + ICE_POINT_K,
                spread: need("gas_c_sd"),
                lower: need("gas_c_min") + ICE_POINT_K,
                upper: need("gas_c_max") + ICE_POINT_K,
            },
            h_w_m2_k: lognormal("h_w_m2k_median", "h_gsd", "h_min", "h_max", 1.0),
            decay_s: lognormal("decay_s_median", "decay_gsd", "decay_min_s", "decay_max_s", 1.0),
            heated_fraction: self.heated_fraction(),
        }
    }

    /// Heated share of a boulder's surface where the record is silent (assumption).
    fn heated_fraction(self) -> Distribution {
        let (low, mode, high) = match self {
            ExposureClass::LightSurface => (0.1, 0.2, 0.4),
            ExposureClass::Grass => (0.2, 0.4, 0.6),
            ExposureClass::Shrub => (0.3, 0.5, 0.8),
            ExposureClass::ForestSurface => (0.2, 0.4, 0.7),
            ExposureClass::Crown => (0.5, 0.8, 1.0),
            ExposureClass::HeavyDeadWood => (0.3, 0.6, 0.9),
            ExposureClass::LogContact | ExposureClass::SmoulderingContact => (0.05, 0.15, 0.4),
        };
        Distribution::triangular(low, mode, high)
    }

    /// Black-body irradiance at a gas temperature, the rule of smouldering contact.
    pub fn black_body_w_m2(gas_k: f64) -> f64 {
        STEFAN_BOLTZMANN_W_M2_K4 * gas_k.powi(4)
    }

    /// The classes that a bare residence time points to, with equal shares (fire rules, step 1).
    ///
    /// ```
    /// use spallcast::fire::exposure::ExposureClass;
    /// assert_eq!(ExposureClass::inferred_from_residence(12.0), &[ExposureClass::Grass]);
    /// assert_eq!(ExposureClass::inferred_from_residence(60.0).len(), 2);
    /// ```
    pub fn inferred_from_residence(residence_s: f64) -> &'static [ExposureClass] {
        const MIXED_S: f64 = 20.0;
        const HEAVY_S: f64 = 150.0;
        const CONTACT_S: f64 = 1800.0;
        if residence_s < MIXED_S {
            &[ExposureClass::Grass]
        } else if residence_s < HEAVY_S {
            &[ExposureClass::Shrub, ExposureClass::ForestSurface]
        } else if residence_s <= CONTACT_S {
            &[ExposureClass::HeavyDeadWood]
        } else {
            &[ExposureClass::LogContact]
        }
    }
}

/// Radius of the heated patch on a flat face where nothing about it was recorded, m (assumption).
pub fn default_patch_radius_m(kind: Kind) -> f64 {
    match kind {
        Kind::Boulder => 0.5,
        Kind::Outcrop => 1.0,
    }
}
