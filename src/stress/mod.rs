//! From temperature to stress: the restrained skin, the sphere, the heated patch.
//!
//! Compression in the skin is positive; tension normal to the surface is positive.

pub mod patch;
pub mod skin;
pub mod sphere;
