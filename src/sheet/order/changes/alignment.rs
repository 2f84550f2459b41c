//! Which layer of one table is which of another.

use serde_json::Value;

/// Largest table of lengths, entries: beyond it layers are paired by their numbers.
const MOST_ENTRIES: usize = 4_000_000;

/// Pairs of places in growth order: a layer of either table without partner stands alone.
///
/// Layers are partners along the longest run of layers of one role and one composition, or of one
/// role alone where both tables have as many layers left between such partners.
pub(super) fn aligned(old: &[Value], new: &[Value]) -> Vec<(Option<usize>, Option<usize>)> {
    if old.len() == new.len() {
        return (0..old.len()).map(|it| (Some(it), Some(it))).collect();
    }
    let partners = if old.len() * new.len() <= MOST_ENTRIES {
        common(old, new)
    } else {
        Vec::new()
    };
    let mut pairs = Vec::new();
    let (mut at_old, mut at_new) = (0, 0);
    let ends = std::iter::once((old.len(), new.len()));
    for (was, is) in partners.into_iter().chain(ends) {
        let (left, right) = (at_old..was, at_new..is);
        let both = if left.len() == right.len() {
            left.len()
        } else {
            0
        };
        pairs.extend((0..both).map(|it| (Some(at_old + it), Some(at_new + it))));
        pairs.extend(left.skip(both).map(|it| (Some(it), None)));
        pairs.extend(right.skip(both).map(|it| (None, Some(it))));
        if was < old.len() && is < new.len() {
            pairs.push((Some(was), Some(is)));
        }
        (at_old, at_new) = (was + 1, is + 1);
    }
    pairs
}

fn is_alike(one: &Value, other: &Value) -> bool {
    let same = |key: &str| one.get(key) == other.get(key);
    let end = |layer: &Value| layer.pointer("/grade_to/formula").cloned();
    same("role") && same("formula") && end(one) == end(other)
}

/// The longest common run of layers that are alike, as pairs of places.
fn common(old: &[Value], new: &[Value]) -> Vec<(usize, usize)> {
    let width = new.len() + 1;
    // Length of the longest run from (i, j) on.
    let mut lengths = vec![0u32; (old.len() + 1) * width];
    for i in (0..old.len()).rev() {
        for j in (0..new.len()).rev() {
            lengths[i * width + j] = if is_alike(&old[i], &new[j]) {
                lengths[(i + 1) * width + j + 1] + 1
            } else {
                lengths[(i + 1) * width + j].max(lengths[i * width + j + 1])
            };
        }
    }
    let mut pairs = Vec::new();
    let (mut i, mut j) = (0, 0);
    while i < old.len() && j < new.len() {
        if is_alike(&old[i], &new[j]) {
            pairs.push((i, j));
            (i, j) = (i + 1, j + 1);
        } else if lengths[(i + 1) * width + j] >= lengths[i * width + j + 1] {
            i += 1;
        } else {
            j += 1;
        }
    }
    pairs
}
