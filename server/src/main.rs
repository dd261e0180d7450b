//! The `meterwright` program.

fn main() {}
