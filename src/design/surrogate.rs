//! A quadratic in a few variables, from central differences of the function that it stands for.

/// f₀ + Σ g_i x_i + ½ Σ h_ij x_i x_j.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Quadratic {
    /// The value at the origin.
    pub(super) centre: f64,
    /// First derivatives.
    pub(super) slopes: Vec<f64>,
    /// Second derivatives, row by row.
    pub(super) curvatures: Vec<Vec<f64>>,
}

/// The points at which a function of so many variables is wanted: the origin, ± `step` along each
/// axis, and for each pair of axes both together to either side.
#[must_use]
pub(super) fn points(variables: usize, step: f64) -> Vec<Vec<f64>> {
    let along = |moves: &[(usize, f64)]| {
        let mut point = vec![0.0; variables];
        for &(variable, to) in moves {
            point[variable] = to;
        }
        point
    };
    let mut points = vec![along(&[])];
    for variable in 0..variables {
        points.push(along(&[(variable, step)]));
        points.push(along(&[(variable, -step)]));
    }
    for (first, second) in pairs(variables) {
        points.push(along(&[(first, step), (second, step)]));
        points.push(along(&[(first, -step), (second, -step)]));
    }
    points
}

fn pairs(variables: usize) -> impl Iterator<Item = (usize, usize)> {
    (0..variables).flat_map(move |first| (first + 1..variables).map(move |second| (first, second)))
}

impl Quadratic {
    /// The quadratic through the values at [`points`].
    ///
    /// # Discretisation
    ///
    /// With f± at ±h along one axis and f±± at (±h, ±h) along two,
    ///
    /// ```text
    ///  g_i  = (f₊ − f₋)/2h          h_ii = (f₊ − 2 f₀ + f₋)/h²
    ///  h_ij = (f₊₊ + f₋₋ − f₊₀ − f₋₀ − f₀₊ − f₀₋ + 2 f₀)/2h²
    /// ```
    ///
    /// all exact for a quadratic; the error of a smooth function is of second order in h.
    #[must_use]
    pub(super) fn through(values: &[f64], variables: usize, step: f64) -> Self {
        let centre = values[0];
        let sides = |variable: usize| (values[1 + 2 * variable], values[2 + 2 * variable]);
        let mut curvatures = vec![vec![0.0; variables]; variables];
        let mut slopes = Vec::with_capacity(variables);
        for (variable, row) in curvatures.iter_mut().enumerate() {
            let (above, below) = sides(variable);
            slopes.push((above - below) / (2.0 * step));
            row[variable] = (above - 2.0 * centre + below) / (step * step);
        }
        let mut next = 1 + 2 * variables;
        for (first, second) in pairs(variables) {
            let (both_up, both_down) = (values[next], values[next + 1]);
            next += 2;
            let (a, b) = (sides(first), sides(second));
            let mixed =
                (both_up + both_down - a.0 - a.1 - b.0 - b.1 + 2.0 * centre) / (2.0 * step * step);
            curvatures[first][second] = mixed;
            curvatures[second][first] = mixed;
        }
        Self {
            centre,
            slopes,
            curvatures,
        }
    }

    /// Its value at a point.
    #[must_use]
    pub(super) fn at(&self, point: &[f64]) -> f64 {
        let mut value = self.centre;
        for ((&x, slope), row) in point.iter().zip(&self.slopes).zip(&self.curvatures) {
            let bent: f64 = row.iter().zip(point).map(|(h, y)| h * y).sum();
            value += x * (slope + 0.5 * bent);
        }
        value
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_quadratic_is_found_whatever_the_step() {
        let truth = Quadratic {
            centre: 1310.0,
            slopes: vec![3.0, -1.0, 0.5],
            curvatures: vec![
                vec![0.2, -0.1, 0.0],
                vec![-0.1, 0.4, 0.3],
                vec![0.0, 0.3, -0.6],
            ],
        };
        let values: Vec<f64> = points(3, 1.7).iter().map(|point| truth.at(point)).collect();
        let found = Quadratic::through(&values, 3, 1.7);
        let place = [0.3, -2.1, 1.4];
        assert!((found.at(&place) - truth.at(&place)).abs() < 1e-9);
        for (got, want) in found.slopes.iter().zip(&truth.slopes) {
            assert!((got - want).abs() < 1e-9, "{got} instead of {want}");
        }
    }

    #[test]
    fn the_error_falls_with_the_square_of_the_step() {
        let function = |point: &[f64]| (0.3 * point[0] - 0.2 * point[1]).exp();
        let miss = |step: f64| {
            let values: Vec<f64> = points(2, step)
                .iter()
                .map(|point| function(point))
                .collect();
            (Quadratic::through(&values, 2, step).curvatures[0][1] + 0.06).abs()
        };
        let order = (miss(0.2) / miss(0.1)).log2();
        assert!((order - 2.0).abs() < 0.1, "order {order}");
    }
}
