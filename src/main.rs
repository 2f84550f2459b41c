//! The program: words in, files and exit code out.
fn main() {}
