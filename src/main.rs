//! Command line of orbitsum.

fn main() {}
