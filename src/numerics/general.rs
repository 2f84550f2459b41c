//! Vectors to start an iteration from.

/// Vectors with a share of every other, from a fixed sequence (xorshift): the same in every run.
#[must_use]
pub fn general_vectors(count: usize, length: usize) -> Vec<Vec<f64>> {
    let mut seed = 0x9e37_79b9_7f4a_7c15_u64;
    let mut next = || {
        seed ^= seed << 13;
        seed ^= seed >> 7;
        seed ^= seed << 17;
        (seed >> 11) as f64 / (1u64 << 53) as f64 - 0.5
    };
    (0..count)
        .map(|_| (0..length).map(|_| next()).collect())
        .collect()
}
