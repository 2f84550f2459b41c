//! Roots of functions of one variable, always inside a bracket.

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
}
