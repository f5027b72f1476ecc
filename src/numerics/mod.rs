//! Numbers without a domain: lanes of draws, table rows, cubics, interpolation tables, quantiles.

pub mod cubic;
pub mod gather;
pub mod lanes;
pub mod quantile;
pub mod table;
