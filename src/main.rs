//! The program: parse, plan, run, exit.
fn main() {}
