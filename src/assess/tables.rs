//! What is sampled once per run and shared by every boulder: rocks and exposure classes at the run's points.

use std::collections::BTreeMap;

use crate::ensemble::distribution::{Distribution, normal_cdf, normal_score};
use crate::ensemble::points::{Dimension, PointSet};
use crate::fire::exposure::ExposureClass;
use crate::heat::material::HeatCurve;
use crate::rock::Property;
use crate::rock::catalogue::{Catalogue, Rock};
use crate::spall::slab::StrengthLaw;
use crate::stress::skin::SkinLaw;

/// Correlation of (ln residence, ln irradiance) and of (ln irradiance, gas temperature) (judgement).
const RESIDENCE_IRRADIANCE: f64 = 0.3;
const IRRADIANCE_GAS: f64 = 0.6;

/// The dimension that a property is drawn from.
pub fn dimension_of(property: Property) -> Dimension {
    match property {
        Property::Density => Dimension::Density,
        // Conductivity is never sampled on its own: it follows from diffusivity, density and specific heat.
        Property::Conductivity | Property::Diffusivity => Dimension::Diffusivity,
        Property::SpecificHeat => Dimension::SpecificHeat,
        Property::Expansion => Dimension::Expansion,
        Property::YoungsModulus => Dimension::YoungsModulus,
        Property::PoissonsRatio => Dimension::PoissonsRatio,
        Property::CompressiveStrength => Dimension::CompressiveStrength,
        Property::TensileStrength => Dimension::TensileStrength,
        Property::WeibullModulus => Dimension::WeibullModulus,
        Property::FractureToughness => Dimension::FractureToughness,
        Property::Porosity => Dimension::Porosity,
        Property::Emissivity => Dimension::Emissivity,
    }
}

/// One rock at the run's points.
#[derive(Debug, Clone)]
pub struct RockTable {
    /// The rock.
    pub rock: Rock,
    /// Its T(v) curve.
    pub curve: HeatCurve,
    /// Its strain and stiffness.
    pub skin: SkinLaw,
    /// Its residual strength.
    pub strength: StrengthLaw,
    samples: Vec<Vec<f64>>,
}

impl RockTable {
    /// Samples of a property, `[draws]`, SI.
    pub fn samples(&self, property: Property) -> &[f64] {
        &self.samples[property as usize]
    }

    fn new(rock: &Rock, points: &PointSet) -> RockTable {
        let sample = |property: &Property| {
            let distribution = rock.figure(*property).distribution;
            points.of(dimension_of(*property)).iter().map(|u| distribution.quantile(*u)).collect()
        };
        RockTable {
            curve: HeatCurve::new(|t| rock.specific_heat_ratio(t)),
            skin: SkinLaw::new(|t| rock.strain_over_expansion(t), |t| rock.residual.youngs_modulus.factor(t)),
            strength: StrengthLaw::new(
                |t| rock.residual.tensile_strength.factor(t),
                |t| rock.residual.fracture_toughness.factor(t),
            ),
            samples: Property::ALL.iter().map(sample).collect(),
            rock: rock.clone(),
        }
    }
}

/// One exposure class at the run's points. Arrays are `[draws]`, SI.
#[derive(Debug, Clone)]
pub struct ClassTable {
    /// Residence where none is recorded.
    pub residence_s: Vec<f64>,
    /// Irradiance.
    pub irradiance_w_m2: Vec<f64>,
    /// Irradiance over its median.
    pub irradiance_share: Vec<f64>,
    /// Gas temperature.
    pub gas_k: Vec<f64>,
    /// Convective coefficient.
    pub h_w_m2_k: Vec<f64>,
    /// Decay time.
    pub decay_s: Vec<f64>,
    /// Heated share.
    pub heated_share: Vec<f64>,
    /// Longest flaming residence of the class.
    pub flaming_max_s: f64,
}

/// Everything sampled once.
#[derive(Debug, Clone)]
pub struct Tables {
    /// By catalogue order.
    pub rocks: Vec<RockTable>,
    classes: BTreeMap<ExposureClass, ClassTable>,
}

impl Tables {
    /// Samples the catalogue and the classes.
    pub fn new(catalogue: &Catalogue, points: &PointSet) -> Tables {
        let u = |d| points.of(d);
        // Gaussian copula: residence leads, irradiance follows it, gas temperature follows irradiance.
        let residence: Vec<f64> = u(Dimension::Residence).to_vec();
        let follow = |lead: &[f64], own: &[f64], correlation: f64| -> Vec<f64> {
            let rest = (1.0 - correlation * correlation).sqrt();
            lead.iter()
                .zip(own)
                .map(|(a, b)| normal_cdf(correlation * normal_score(*a) + rest * normal_score(*b)))
                .collect()
        };
        let irradiance = follow(&residence, u(Dimension::Irradiance), RESIDENCE_IRRADIANCE);
        let gas = follow(&irradiance, u(Dimension::Gas), IRRADIANCE_GAS);
        let sample = |d: &Distribution, us: &[f64]| -> Vec<f64> { us.iter().map(|u| d.quantile(*u)).collect() };
        let classes = ExposureClass::ALL
            .iter()
            .map(|class| {
                let figures = class.figures();
                let gas_k = sample(&figures.gas_k, &gas);
                let irradiance_w_m2 = match &figures.irradiance_w_m2 {
                    Some(d) => sample(d, &irradiance),
                    None => gas_k.iter().map(|t| ExposureClass::black_body_w_m2(*t)).collect(),
                };
                let median = figures
                    .irradiance_w_m2
                    .map_or_else(|| ExposureClass::black_body_w_m2(figures.gas_k.median()), |d| d.median());
                let table = ClassTable {
                    residence_s: sample(&figures.residence_s, &residence),
                    irradiance_share: irradiance_w_m2.iter().map(|g| g / median).collect(),
                    irradiance_w_m2,
                    gas_k,
                    h_w_m2_k: sample(&figures.h_w_m2_k, u(Dimension::Convection)),
                    decay_s: sample(&figures.decay_s, u(Dimension::Decay)),
                    heated_share: sample(&figures.heated_fraction, u(Dimension::HeatedShare)),
                    flaming_max_s: figures.residence_s.upper,
                };
                (*class, table)
            })
            .collect();
        Tables { rocks: catalogue.rocks().iter().map(|r| RockTable::new(r, points)).collect(), classes }
    }

    /// One class.
    pub fn class(&self, class: ExposureClass) -> &ClassTable {
        &self.classes[&class]
    }

    /// Index of a rock by its catalogue key.
    pub fn rock_index(&self, key: &str) -> Option<usize> {
        self.rocks.iter().position(|r| r.rock.name == key)
    }
}
