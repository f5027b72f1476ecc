//! Numbers without a domain: lanes of draws, interpolation tables, tridiagonal elimination, quantiles.

pub mod cubic;
pub mod gather;
pub mod lanes;
pub mod quantile;
pub mod table;
