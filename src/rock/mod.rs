//! The rock catalogue: sixteen rocks, thirteen properties, each figure with distribution, source and basis.
//!
//! * [`catalogue`] reads the embedded tables, applies a user's own rocks, finds a rock by name.
//! * [`laws`] how conductivity follows temperature, and the published forms used as cross-checks.
//! * [`residual`] what heating leaves of stiffness, strength and toughness.
//! * [`alias`] what field people write, folded to a catalogue rock.
//!
//! Units: SI and kelvin inside; [`Property::input_name`] and [`Property::si_per_input`] belong to the edges.
//! Knows nothing of fire, heat or sites.

pub mod alias;
pub mod catalogue;
pub mod laws;
pub mod residual;

pub use alias::Resolution;
pub use catalogue::{Basis, Catalogue, Figure, Rock, RockError, SpallParameters};
pub use laws::ConductivityLaw;
pub use residual::{ResidualLaw, ResidualLaws};

use crate::bounds::{self, Bound};

/// A catalogue property.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Property {
    /// Density, kg/m3.
    Density,
    /// Conductivity at 20 C, W/mK.
    Conductivity,
    /// Specific heat at 20 C, J/kgK.
    SpecificHeat,
    /// Diffusivity at 20 C, m2/s.
    Diffusivity,
    /// Linear expansion at 20 C, 1/K.
    Expansion,
    /// Young's modulus, Pa.
    YoungsModulus,
    /// Poisson's ratio.
    PoissonsRatio,
    /// Uniaxial compressive strength, Pa.
    CompressiveStrength,
    /// Tensile strength, Pa.
    TensileStrength,
    /// Weibull modulus of tensile strength.
    WeibullModulus,
    /// Fracture toughness, Pa sqrt(m).
    FractureToughness,
    /// Porosity.
    Porosity,
    /// Thermal emissivity.
    Emissivity,
}

/// How a property is written: catalogue key, SI unit, input name, input unit, SI units in one input unit.
struct Spelling(&'static str, &'static str, &'static str, &'static str, f64);

impl Property {
    /// Every property, in catalogue order.
    pub const ALL: [Property; 13] = [
        Property::Density,
        Property::Conductivity,
        Property::SpecificHeat,
        Property::Diffusivity,
        Property::Expansion,
        Property::YoungsModulus,
        Property::PoissonsRatio,
        Property::CompressiveStrength,
        Property::TensileStrength,
        Property::WeibullModulus,
        Property::FractureToughness,
        Property::Porosity,
        Property::Emissivity,
    ];

    const fn spelling(self) -> Spelling {
        match self {
            Property::Density => Spelling("density_kg_m3", "kg/m3", "density_kg_m3", "kg/m3", 1.0),
            Property::Conductivity => Spelling("conductivity_w_m_k", "W/mK", "conductivity_w_m_k", "W/mK", 1.0),
            Property::SpecificHeat => Spelling("specific_heat_j_kg_k", "J/kgK", "specific_heat_j_kg_k", "J/kgK", 1.0),
            Property::Diffusivity => Spelling("diffusivity_m2_s", "m2/s", "diffusivity_mm2_s", "mm2/s", 1e-6),
            Property::Expansion => Spelling("expansion_per_k", "1/K", "expansion_per_k", "1/K", 1.0),
            Property::YoungsModulus => Spelling("youngs_modulus_pa", "Pa", "youngs_modulus_gpa", "GPa", 1e9),
            Property::PoissonsRatio => Spelling("poissons_ratio", "", "poissons_ratio", "", 1.0),
            Property::CompressiveStrength => {
                Spelling("compressive_strength_pa", "Pa", "compressive_strength_mpa", "MPa", 1e6)
            }
            Property::TensileStrength => Spelling("tensile_strength_pa", "Pa", "tensile_strength_mpa", "MPa", 1e6),
            Property::WeibullModulus => Spelling("weibull_modulus", "", "weibull_modulus", "", 1.0),
            Property::FractureToughness => Spelling(
                "fracture_toughness_pa_sqrt_m",
                "Pa sqrt(m)",
                "fracture_toughness_mpa_sqrt_m",
                "MPa sqrt(m)",
                1e6,
            ),
            Property::Porosity => Spelling("porosity", "", "porosity", "", 1.0),
            Property::Emissivity => Spelling("emissivity", "", "emissivity", "", 1.0),
        }
    }

    /// The word in the `property` column of the catalogue, SI.
    pub const fn key(self) -> &'static str {
        self.spelling().0
    }
    /// SI unit; empty for a plain number.
    pub const fn unit(self) -> &'static str {
        self.spelling().1
    }
    /// The name of the boulder column and of `--set`.
    pub const fn input_name(self) -> &'static str {
        self.spelling().2
    }
    /// Unit of the input; empty for a plain number.
    pub const fn input_unit(self) -> &'static str {
        self.spelling().3
    }
    /// SI units in one input unit: SI value = input value x this.
    pub const fn si_per_input(self) -> f64 {
        self.spelling().4
    }

    /// The property whose catalogue key is `key`.
    ///
    /// ```
    /// use spallcast::rock::Property;
    /// assert_eq!(Property::from_key("youngs_modulus_pa"), Some(Property::YoungsModulus));
    /// assert_eq!(Property::from_key("youngs_modulus_gpa"), None);
    /// ```
    pub fn from_key(key: &str) -> Option<Property> {
        Property::ALL.into_iter().find(|p| p.key() == key)
    }

    /// The property whose input name is `name`, for boulder columns and `--set`.
    ///
    /// ```
    /// use spallcast::rock::Property;
    /// let p = Property::parse("diffusivity_mm2_s").unwrap();
    /// assert_eq!((p, p.si_per_input()), (Property::Diffusivity, 1e-6));
    /// ```
    pub fn parse(name: &str) -> Option<Property> {
        Property::ALL.into_iter().find(|p| p.input_name() == name)
    }

    /// Its physical range, in input units.
    ///
    /// # Panics
    /// If the range table lacks it, which a test rules out.
    pub fn bound(self) -> &'static Bound {
        bounds::bound(self.input_name()).expect("every catalogue property has a physical range")
    }
}
