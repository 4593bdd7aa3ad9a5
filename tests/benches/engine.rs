//! Benches of the engine.
fn main() {}
