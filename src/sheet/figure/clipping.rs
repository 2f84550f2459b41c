//! Lines and areas cut at the edges of a plot.

use super::scene::{Point, Rectangle};

/// The parts of a chain of straight lines that lie inside a rectangle.
///
/// Each segment is cut by the four edges in turn: Y.-D. Liang, B. A. Barsky, ACM Trans. Graph. 3,
/// 1 (1984).
pub(crate) fn clipped_line(points: &[Point], inside: Rectangle) -> Vec<Vec<Point>> {
    let mut parts: Vec<Vec<Point>> = Vec::new();
    let mut open = false;
    for pair in points.windows(2) {
        let Some((start, end)) = clipped_segment(pair[0], pair[1], inside) else {
            open = false;
            continue;
        };
        match parts.last_mut() {
            Some(part) if open && part.last() == Some(&start) => part.push(end),
            _ => parts.push(vec![start, end]),
        }
        open = end == pair[1];
    }
    parts
}

/// The part of one segment inside a rectangle.
fn clipped_segment(from: Point, to: Point, inside: Rectangle) -> Option<(Point, Point)> {
    let (dx, dy) = (to.0 - from.0, to.1 - from.1);
    let edges = [
        (-dx, from.0 - inside.left_px),
        (dx, inside.right_px - from.0),
        (-dy, from.1 - inside.top_px),
        (dy, inside.bottom_px - from.1),
    ];
    let (mut enter, mut leave) = (0.0f64, 1.0f64);
    for (outward, room) in edges {
        if outward == 0.0 {
            if room < 0.0 {
                return None;
            }
        } else if outward < 0.0 {
            enter = enter.max(room / outward);
        } else {
            leave = leave.min(room / outward);
        }
    }
    if enter > leave {
        return None;
    }
    let at = |share: f64| (from.0 + share * dx, from.1 + share * dy);
    Some((
        if enter > 0.0 { at(enter) } else { from },
        if leave < 1.0 { at(leave) } else { to },
    ))
}

/// The part of an area inside a rectangle; where the area leaves and comes back, its outline runs
/// along the edge.
///
/// I. E. Sutherland, G. W. Hodgman, Commun. ACM 17, 32 (1974).
pub(crate) fn clipped_area(outline: &[Point], inside: Rectangle) -> Vec<Point> {
    // How deep inside each edge a point lies.
    let depths: [&dyn Fn(Point) -> f64; 4] = [
        &|point| point.0 - inside.left_px,
        &|point| inside.right_px - point.0,
        &|point| point.1 - inside.top_px,
        &|point| inside.bottom_px - point.1,
    ];
    let mut kept = outline.to_vec();
    for depth in depths {
        let whole = std::mem::take(&mut kept);
        for (index, &to) in whole.iter().enumerate() {
            let from = whole[(index + whole.len() - 1) % whole.len()];
            let (before, after) = (depth(from), depth(to));
            if (before < 0.0) != (after < 0.0) {
                let share = before / (before - after);
                kept.push((
                    from.0 + share * (to.0 - from.0),
                    from.1 + share * (to.1 - from.1),
                ));
            }
            if after >= 0.0 {
                kept.push(to);
            }
        }
    }
    kept
}

/// Whether a straight line from one point to another touches a rectangle.
pub(crate) fn crosses(from: Point, to: Point, area: Rectangle) -> bool {
    clipped_segment(from, to, area).is_some()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const UNIT: Rectangle = Rectangle {
        left_px: 0.0,
        top_px: 0.0,
        right_px: 1.0,
        bottom_px: 1.0,
    };

    #[test]
    fn a_line_is_cut_where_it_leaves_and_comes_back() {
        let line = [
            (-1.0, 0.5),
            (0.5, 0.5),
            (0.5, 2.0),
            (0.75, 2.0),
            (0.75, 0.0),
        ];
        assert_eq!(
            clipped_line(&line, UNIT),
            [
                vec![(0.0, 0.5), (0.5, 0.5), (0.5, 1.0)],
                vec![(0.75, 1.0), (0.75, 0.0)]
            ]
        );
        assert!(clipped_line(&[(2.0, 0.0), (2.0, 1.0)], UNIT).is_empty());
        assert!(clipped_line(&[(0.5, 0.5)], UNIT).is_empty());
    }

    fn area_px2(outline: &[Point]) -> f64 {
        let twice: f64 = (0..outline.len())
            .map(|i| {
                let ((ax, ay), (bx, by)) = (outline[i], outline[(i + 1) % outline.len()]);
                ax * by - bx * ay
            })
            .sum();
        0.5 * twice.abs()
    }

    #[test]
    fn an_area_is_cut_to_the_common_part() {
        let square = [(0.5, 0.5), (2.0, 0.5), (2.0, 2.0), (0.5, 2.0)];
        assert!((area_px2(&clipped_area(&square, UNIT)) - 0.25).abs() < 1e-12);
        let around = [(-1.0, -1.0), (2.0, -1.0), (2.0, 2.0), (-1.0, 2.0)];
        assert!((area_px2(&clipped_area(&around, UNIT)) - 1.0).abs() < 1e-12);
        assert!(clipped_area(&[(3.0, 3.0), (4.0, 3.0), (4.0, 4.0)], UNIT).is_empty());
        assert!(clipped_area(&[], UNIT).is_empty());
    }

    proptest! {
        #[test]
        fn nothing_is_left_outside(
            points in prop::collection::vec((-9.0..9.0f64, -9.0..9.0f64), 0..20),
        ) {
            let room = UNIT.grown(1e-9);
            for part in clipped_line(&points, UNIT) {
                prop_assert!(part.iter().all(|point| room.holds(*point)));
            }
            prop_assert!(clipped_area(&points, UNIT).iter().all(|point| room.holds(*point)));
        }
    }
}
