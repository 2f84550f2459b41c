//! Values that stand close together.

use std::ops::Range;

/// Ranges of values in order, rising or falling, whose neighbours are closer than `within`.
#[must_use]
pub fn clusters(values: &[f64], within: f64) -> Vec<Range<usize>> {
    let mut clusters = Vec::new();
    let mut start = 0;
    for end in 1..=values.len() {
        let apart = |next: &f64| (next - values[end - 1]).abs() >= within;
        if values.get(end).is_none_or(apart) {
            clusters.push(start..end);
            start = end;
        }
    }
    clusters
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn neighbours_chain_and_gaps_cut() {
        assert_eq!(clusters(&[], 1.0), []);
        assert_eq!(clusters(&[3.0, 2.5, 2.0, 0.5], 1.0), [0..3, 3..4]);
        assert_eq!(clusters(&[0.0, 1.0, 1.5], 1.0), [0..1, 1..3]);
    }
}
