//! The rock catalogue: sixteen rocks, thirteen properties, each with distribution, source and basis.

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
}
