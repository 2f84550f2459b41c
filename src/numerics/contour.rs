//! Lines of equal value through numbers on a rectangular grid, by marching squares.
//!
//! Along every edge of the grid the value is taken to be linear. A square whose four corners
//! alternate is settled by the mean of them. Where one corner of a square has no value, the triangle
//! of the other three is used; where more are missing the lines end.

use std::collections::BTreeMap;

/// A line through points (x, y), in order; a closed one ends where it begins.
#[derive(Clone, Debug, PartialEq)]
pub struct Line {
    /// Its points.
    pub points: Vec<(f64, f64)>,
    /// Whether it is closed.
    pub closed: bool,
}

impl Line {
    /// Lengths along the line from its first point to each, on axes scaled by (x, y).
    #[must_use]
    pub fn lengths(&self, scale: (f64, f64)) -> Vec<f64> {
        let mut lengths = vec![0.0];
        for pair in self.points.windows(2) {
            let last = lengths[lengths.len() - 1];
            let step = (scale.0 * (pair[1].0 - pair[0].0)).hypot(scale.1 * (pair[1].1 - pair[0].1));
            lengths.push(last + step);
        }
        lengths
    }

    /// The point at a length along the line, `lengths` being those of [`Self::lengths`].
    #[must_use]
    pub fn at(&self, length: f64, lengths: &[f64]) -> (f64, f64) {
        let next = lengths.partition_point(|&it| it < length);
        let next = next.clamp(1, lengths.len().saturating_sub(1).max(1));
        let (Some(&a), Some(&b)) = (self.points.get(next - 1), self.points.get(next)) else {
            return self.points[0];
        };
        let step = lengths[next] - lengths[next - 1];
        let share = if step > 0.0 {
            ((length - lengths[next - 1]) / step).clamp(0.0, 1.0)
        } else {
            0.0
        };
        (a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1))
    }
}

/// Numbers on a grid, row by row from the lowest y, each row from the lowest x.
#[derive(Clone, Copy, Debug)]
pub struct Grid<'a> {
    /// Columns.
    pub x: &'a [f64],
    /// Rows.
    pub y: &'a [f64],
    /// Values, `x.len() * y.len()` of them.
    pub values: &'a [Option<f64>],
}

/// Where a line crosses: an edge along x, along y, or the diagonal of a square.
type Crossing = (u8, usize, usize);

impl Grid<'_> {
    fn value(&self, column: usize, row: usize) -> Option<f64> {
        self.values[row * self.x.len() + column].filter(|value| value.is_finite())
    }

    /// The value between grid points, bilinear; `None` where a corner has none or outside.
    #[must_use]
    pub fn at(&self, x: f64, y: f64) -> Option<f64> {
        let cell = |axis: &[f64], at: f64| {
            let last = axis.len().checked_sub(2)?;
            if at < axis[0] || at > axis[last + 1] {
                return None;
            }
            let low = axis
                .partition_point(|&it| it <= at)
                .saturating_sub(1)
                .min(last);
            Some((low, (at - axis[low]) / (axis[low + 1] - axis[low])))
        };
        let ((column, across), (row, up)) = (cell(self.x, x)?, cell(self.y, y)?);
        let mut sum = 0.0;
        for (place, share) in [
            ((column, row), (1.0 - across) * (1.0 - up)),
            ((column + 1, row), across * (1.0 - up)),
            ((column, row + 1), (1.0 - across) * up),
            ((column + 1, row + 1), across * up),
        ] {
            if share > 0.0 {
                sum += share * self.value(place.0, place.1)?;
            }
        }
        Some(sum)
    }

    /// The lines on which the value is `level`.
    #[must_use]
    pub fn lines(&self, level: f64) -> Vec<Line> {
        let mut places: BTreeMap<Crossing, (f64, f64)> = BTreeMap::new();
        let mut joined: BTreeMap<Crossing, Vec<Crossing>> = BTreeMap::new();
        for row in 0..self.y.len().saturating_sub(1) {
            for column in 0..self.x.len().saturating_sub(1) {
                for [from, to] in self.segments(column, row, level, &mut places) {
                    joined.entry(from).or_default().push(to);
                    joined.entry(to).or_default().push(from);
                }
            }
        }
        chained(&places, &joined)
    }

    /// Pieces of the lines in one square.
    fn segments(
        &self,
        column: usize,
        row: usize,
        level: f64,
        places: &mut BTreeMap<Crossing, (f64, f64)>,
    ) -> Vec<[Crossing; 2]> {
        // Corners and edges in the sense of the clock's hand backwards, from the lower left.
        let corners = [(0, 0), (1, 0), (1, 1), (0, 1)];
        let values = corners.map(|(right, up)| self.value(column + right, row + up));
        let mut at = |from: usize, to: usize, crossing: Crossing| {
            let (Some(a), Some(b)) = (values[from], values[to]) else {
                return None;
            };
            if (a >= level) == (b >= level) {
                return None;
            }
            let share = (level - a) / (b - a);
            let place = |corner: usize| {
                let (right, up) = corners[corner];
                (self.x[column + right], self.y[row + up])
            };
            let ((ax, ay), (bx, by)) = (place(from), place(to));
            // The same bytes from either side of an edge: always from the lower corner.
            places
                .entry(crossing)
                .or_insert((ax + share * (bx - ax), ay + share * (by - ay)));
            Some(crossing)
        };
        let edges = [
            (0, 1, (0, column, row)),
            (1, 2, (1, column + 1, row)),
            (3, 2, (0, column, row + 1)),
            (0, 3, (1, column, row)),
        ];
        let missing: Vec<usize> = (0..4).filter(|&it| values[it].is_none()).collect();
        if let [missing] = missing.as_slice() {
            let diagonal = if missing % 2 == 0 { (1, 3) } else { (0, 2) };
            let mut crossings: Vec<Crossing> = edges
                .into_iter()
                .filter_map(|(from, to, crossing)| at(from, to, crossing))
                .collect();
            crossings.extend(at(diagonal.0, diagonal.1, (2, column, row)));
            return match crossings.as_slice() {
                &[from, to] => vec![[from, to]],
                _ => Vec::new(),
            };
        }
        let crossings: Vec<Crossing> = edges
            .into_iter()
            .filter_map(|(from, to, crossing)| at(from, to, crossing))
            .collect();
        match *crossings.as_slice() {
            [from, to] => vec![[from, to]],
            [bottom, right, top, left] => {
                let mean = values.iter().flatten().sum::<f64>() / 4.0;
                let low_left = values[0].is_some_and(|value| value >= level);
                if (mean >= level) == low_left {
                    vec![[bottom, right], [top, left]]
                } else {
                    vec![[left, bottom], [right, top]]
                }
            }
            _ => Vec::new(),
        }
    }
}

/// Pieces joined to lines, open ones first from one of their ends.
fn chained(
    places: &BTreeMap<Crossing, (f64, f64)>,
    joined: &BTreeMap<Crossing, Vec<Crossing>>,
) -> Vec<Line> {
    let mut left: BTreeMap<Crossing, Vec<Crossing>> = joined.clone();
    let mut lines = Vec::new();
    let ends: Vec<Crossing> = joined
        .iter()
        .filter(|(_, others)| others.len() == 1)
        .map(|(crossing, _)| *crossing)
        .collect();
    let starts = ends.into_iter().chain(joined.keys().copied());
    for start in starts {
        let mut points = Vec::new();
        let mut here = start;
        while let Some(next) = left.get_mut(&here).and_then(Vec::pop) {
            if points.is_empty() {
                points.push(places[&here]);
            }
            if let Some(back) = left.get_mut(&next)
                && let Some(at) = back.iter().position(|it| *it == here)
            {
                back.remove(at);
            }
            points.push(places[&next]);
            here = next;
        }
        if points.len() > 1 {
            lines.push(Line {
                closed: here == start,
                points,
            });
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    fn axis(from: f64, to: f64, count: usize) -> Vec<f64> {
        (0..count)
            .map(|at| from + (to - from) * at as f64 / (count - 1) as f64)
            .collect()
    }

    fn field(x: &[f64], y: &[f64], of: impl Fn(f64, f64) -> Option<f64>) -> Vec<Option<f64>> {
        y.iter()
            .flat_map(|&y| x.iter().map(|&x| of(x, y)).collect::<Vec<_>>())
            .collect()
    }

    #[test]
    fn a_circle_is_one_closed_line_of_its_circumference() {
        let (x, y) = (axis(-2.0, 2.0, 81), axis(-2.0, 2.0, 81));
        let values = field(&x, &y, |x, y| Some(x * x + y * y));
        let grid = Grid {
            x: &x,
            y: &y,
            values: &values,
        };
        let lines = grid.lines(1.0);
        assert_eq!(lines.len(), 1);
        assert!(lines[0].closed);
        let lengths = lines[0].lengths((1.0, 1.0));
        let circumference = lengths[lengths.len() - 1];
        assert!((circumference / std::f64::consts::TAU - 1.0).abs() < 2e-3);
    }

    #[test]
    fn a_plane_gives_a_straight_line_from_edge_to_edge() {
        let (x, y) = (axis(0.0, 1.0, 5), axis(0.0, 2.0, 4));
        let values = field(&x, &y, |x, y| Some(2.0 * x + y));
        let grid = Grid {
            x: &x,
            y: &y,
            values: &values,
        };
        let lines = grid.lines(1.1);
        assert_eq!(lines.len(), 1);
        assert!(!lines[0].closed);
        for (x, y) in &lines[0].points {
            assert!((2.0 * x + y - 1.1).abs() < 1e-12);
        }
        let ends = [
            lines[0].points[0],
            lines[0].points[lines[0].points.len() - 1],
        ];
        assert!(ends.iter().any(|end| end.0 == 0.0) && ends.iter().any(|end| end.1 == 0.0));
        assert!((grid.at(0.37, 0.9).expect("inside") - 1.64).abs() < 1e-12);
        assert_eq!(grid.at(1.1, 0.0), None);
    }

    #[test]
    fn a_saddle_has_two_lines_that_do_not_cross() {
        let (x, y) = (axis(-1.0, 1.0, 4), axis(-1.0, 1.0, 4));
        let values = field(&x, &y, |x, y| Some(x * y));
        for level in [0.01, -0.01] {
            let grid = Grid {
                x: &x,
                y: &y,
                values: &values,
            };
            assert_eq!(grid.lines(level).len(), 2, "{level}");
        }
    }

    #[test]
    fn a_line_ends_where_values_do() {
        let (x, y) = (axis(0.0, 1.0, 11), axis(0.0, 1.0, 11));
        let values = field(&x, &y, |x, y| (x < 0.55).then_some(y));
        let grid = Grid {
            x: &x,
            y: &y,
            values: &values,
        };
        let lines = grid.lines(0.23);
        assert_eq!(lines.len(), 1);
        let reach = lines[0].points.iter().map(|it| it.0).fold(0.0, f64::max);
        assert_eq!(reach, 0.5);
    }
}
