//! Quadrature: Gauss-Legendre panels between breakpoints.

/// Nodes and weights of the eight-point Gauss-Legendre rule on [−1, 1] (positive half).
///
/// Source: M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions (1964), table 25.4.
const EIGHT: [(f64, f64); 4] = [
    (0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.525_532_409_916_329, 0.313_706_645_877_887_3),
    (0.796_666_477_413_626_7, 0.222_381_034_453_374_5),
    (0.960_289_856_497_536_3, 0.101_228_536_290_376_3),
];

/// Nodes and weights that integrate from the first to the last of rising `breaks`, with panels no
/// wider than `widest`: exact for polynomials of degree 15 on each panel.
#[must_use]
pub fn panels(breaks: &[f64], widest: f64) -> Vec<(f64, f64)> {
    let mut nodes = Vec::new();
    for pair in breaks.windows(2) {
        let length = pair[1] - pair[0];
        if length <= 0.0 {
            continue;
        }
        let count = (length / widest).ceil().max(1.0);
        let half = 0.5 * length / count;
        let mut index = 0.0;
        while index < count {
            let middle = pair[0] + (2.0 * index + 1.0) * half;
            for &(node, weight) in EIGHT.iter().rev() {
                nodes.push((middle - half * node, half * weight));
            }
            for &(node, weight) in &EIGHT {
                nodes.push((middle + half * node, half * weight));
            }
            index += 1.0;
        }
    }
    nodes
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_panel_is_exact_to_degree_fifteen_and_not_beyond() {
        let integral = |power: i32| -> f64 {
            panels(&[0.0, 2.0], 10.0)
                .iter()
                .map(|&(x, w)| w * x.powi(power))
                .sum()
        };
        for power in [0, 7, 15] {
            let exact = 2f64.powi(power + 1) / f64::from(power + 1);
            assert!(
                (integral(power) / exact - 1.0).abs() < 1e-13,
                "degree {power}"
            );
        }
        let exact = 2f64.powi(17) / 17.0;
        assert!((integral(16) / exact - 1.0).abs() > 1e-12);
    }

    #[test]
    fn a_break_at_a_jump_keeps_the_order() {
        let step = |x: f64| if x < 0.3 { 0.0 } else { x.exp() };
        let got: f64 = panels(&[0.0, 0.3, 1.0], 0.5)
            .iter()
            .map(|&(x, w)| w * step(x))
            .sum();
        assert!((got - (1f64.exp() - 0.3f64.exp())).abs() < 1e-14);
    }
}
