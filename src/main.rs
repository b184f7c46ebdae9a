//! The program: hands everything to the library.

fn main() {}
