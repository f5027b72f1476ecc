//! Numbers to layers, tables and records.
pub mod message;
pub mod probe_table;
pub mod rock_table;
