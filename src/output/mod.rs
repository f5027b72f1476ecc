//! Numbers to layers, tables and records.
pub mod rock_table;
