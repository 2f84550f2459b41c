//! Roots and maxima of functions of one variable, always inside a bracket.

/// A root of `function` between `low` and `high`, where its signs differ.
///
/// Brent's combination of inverse quadratic interpolation, secant and bisection: never leaves the
/// bracket, never slower than bisection by more than a constant factor. If the signs do not differ
/// the end with the smaller value is returned.
///
/// # Arguments
///
/// * `tolerance` – the root is located to this, plus rounding
///
/// # Reference
///
/// R. P. Brent, Algorithms for Minimization without Derivatives (1973), chapter 4.
pub fn bracketed_root(
    mut function: impl FnMut(f64) -> f64,
    low: f64,
    high: f64,
    tolerance: f64,
) -> f64 {
    let (mut a, mut b) = (low, high);
    let (mut fa, mut fb) = (function(a), function(b));
    if fa * fb > 0.0 {
        return if fa.abs() < fb.abs() { a } else { b };
    }
    if fa.abs() < fb.abs() {
        std::mem::swap(&mut a, &mut b);
        std::mem::swap(&mut fa, &mut fb);
    }
    let (mut c, mut fc) = (a, fa);
    let mut step = b - a;
    let mut before = step;
    for _ in 0..200 {
        if fb * fc > 0.0 {
            c = a;
            fc = fa;
            step = b - a;
            before = step;
        }
        if fc.abs() < fb.abs() {
            a = b;
            b = c;
            c = a;
            fa = fb;
            fb = fc;
            fc = fa;
        }
        let allowed = 2.0 * f64::EPSILON * b.abs() + 0.5 * tolerance;
        let half = 0.5 * (c - b);
        if half.abs() <= allowed || fb == 0.0 {
            return b;
        }
        if before.abs() >= allowed && fa.abs() > fb.abs() {
            let s = fb / fa;
            let (mut p, mut q) = if a == c {
                (2.0 * half * s, 1.0 - s)
            } else {
                let (q, r) = (fa / fc, fb / fc);
                (
                    s * (2.0 * half * q * (q - r) - (b - a) * (r - 1.0)),
                    (q - 1.0) * (r - 1.0) * (s - 1.0),
                )
            };
            if p > 0.0 {
                q = -q;
            }
            p = p.abs();
            if 2.0 * p < (3.0 * half * q - (allowed * q).abs()).min((before * q).abs()) {
                before = step;
                step = p / q;
            } else {
                step = half;
                before = half;
            }
        } else {
            step = half;
            before = half;
        }
        a = b;
        fa = fb;
        b += if step.abs() > allowed {
            step
        } else {
            allowed.copysign(half)
        };
        fb = function(b);
    }
    b
}

/// Place and height of the highest maximum of `function` on a grid of `points` nodes, refined
/// between its neighbours by golden-section search.
///
/// # Arguments
///
/// * `low`, `high` – the range searched
/// * `points` – nodes of the first look; features narrower than their distance may be missed
/// * `tolerance` – to which the place is refined
pub fn highest_peak(
    mut function: impl FnMut(f64) -> f64,
    low: f64,
    high: f64,
    points: usize,
    tolerance: f64,
) -> (f64, f64) {
    let points = points.max(3);
    let place = |index: usize| low + (high - low) * index as f64 / (points - 1) as f64;
    let heights: Vec<f64> = (0..points).map(|index| function(place(index))).collect();
    let height = |index: usize| heights[index];
    // The three highest local maxima of the grid: a sharper one between nodes may win.
    let mut candidates: Vec<usize> = (0..points)
        .filter(|&at| {
            (at == 0 || height(at - 1) <= height(at))
                && (at + 1 == points || height(at + 1) < height(at))
        })
        .collect();
    candidates.sort_by(|&a, &b| height(b).total_cmp(&height(a)).then(a.cmp(&b)));
    candidates.truncate(3);
    if candidates.is_empty() {
        candidates.push(points - 1);
    }
    candidates
        .into_iter()
        .map(|at| {
            let (below, above) = (place(at.saturating_sub(1)), place((at + 1).min(points - 1)));
            golden_section(&mut function, below, above, tolerance)
        })
        .fold((low, f64::NEG_INFINITY), |best, found| {
            if found.1 > best.1 { found } else { best }
        })
}

/// Maximum of a function with one maximum between `low` and `high`: place and height.
fn golden_section(
    function: &mut impl FnMut(f64) -> f64,
    low: f64,
    high: f64,
    tolerance: f64,
) -> (f64, f64) {
    const GOLDEN: f64 = 0.618_033_988_749_894_8;
    let (mut a, mut b) = (low, high);
    let mut left = b - GOLDEN * (b - a);
    let mut right = a + GOLDEN * (b - a);
    let (mut at_left, mut at_right) = (function(left), function(right));
    while b - a > tolerance {
        if at_left >= at_right {
            b = right;
            right = left;
            at_right = at_left;
            left = b - GOLDEN * (b - a);
            at_left = function(left);
        } else {
            a = left;
            left = right;
            at_left = at_right;
            right = a + GOLDEN * (b - a);
            at_right = function(right);
        }
        if left <= a || right >= b {
            break;
        }
    }
    if at_left >= at_right {
        (left, at_left)
    } else {
        (right, at_right)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn root_of_a_cubic_to_rounding() {
        let root = bracketed_root(|x| x * x * x - 2.0, 0.0, 10.0, 1e-15);
        assert!((root - 2f64.cbrt()).abs() < 1e-14, "{root}");
    }

    #[test]
    fn root_of_a_step_is_found_by_bisection() {
        let root = bracketed_root(|x| if x < 0.3 { -1.0 } else { 1.0 }, 0.0, 1.0, 1e-12);
        assert!((root - 0.3).abs() < 1e-11, "{root}");
    }

    #[test]
    fn the_higher_of_two_peaks_is_refined_off_the_grid() {
        let two = |x: f64| {
            (-(x - 0.3017f64).powi(2) * 4e3).exp() + 0.9 * (-(x - 0.7f64).powi(2) * 1e2).exp()
        };
        let (place, height) = highest_peak(two, 0.0, 1.0, 60, 1e-10);
        assert!((place - 0.3017).abs() < 1e-6, "{place}");
        assert!((height - 1.0).abs() < 1e-6, "{height}");
    }
}
