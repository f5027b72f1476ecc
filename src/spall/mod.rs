//! From stress to spall: one file per family, watched together on the same history.
//!
//! [`flake`] surface compression grows plates of a millimetre; [`slab`] tension normal to the surface takes plates of a
//! centimetre and splits boulders; [`rind`] a recorded weathering rind lets go; [`vapour`] pore pressure in wet tight rock.
//! [`watch`] follows all of them through the steps of a march and [`outcome`] holds what a draw did.

pub mod flake;
pub mod outcome;
pub mod rind;
pub mod slab;
pub mod steam;
pub mod vapour;
pub mod watch;
