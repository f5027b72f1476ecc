//! Transient conduction below a face, for eight draws at a time.
//!
//! rho c(T) dT/dt = (1/r^n) d/dr ( r^n k(T) dT/dr ),  n = 0 plane, 2 sphere
//!
//! [`grid`] lays nodes from the face inward, [`material`] holds the draws' laws, [`boundary`] the exchange at the face,
//! [`step`] advances one step, [`march`] runs a whole history and shows every step to an observer.
//! Nothing here knows what a fire is: an analytic forcing drives it in tests just as a pulse does in a run.

pub mod boundary;
pub mod column;
pub mod grid;
pub mod march;
pub mod material;
pub mod step;
