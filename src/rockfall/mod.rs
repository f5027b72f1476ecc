//! See the modules below.
