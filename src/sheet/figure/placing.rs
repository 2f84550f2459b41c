//! Room for labels: in a column beside a plot, and among the curves inside it.

use super::clipping::crosses;
use super::glyphs::Weight;
use super::lettering::fitted;
use super::palette::Rgb;
use super::scene::{Point, Rectangle};

/// A label that wants to stand beside a plot at the height of what it names.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct SideLabel {
    pub(crate) text: String,
    pub(crate) rgb: Rgb,
    /// What it names, on or inside the edge of the plot.
    pub(crate) anchor: Point,
    /// Height of its middle; the anchor's until it is moved.
    pub(crate) middle_px: f64,
}

/// Labels in a column from `top_px` to `bottom_px`, each `height_px` high, moved as little as
/// possible (in the sense of least squares) until none overlaps. Where there are too many for the
/// column, those nearest to each other are written on one line, within `room_px`.
pub(crate) fn spread(
    mut labels: Vec<SideLabel>,
    (top_px, bottom_px): (f64, f64),
    height_px: f64,
    (size_px, room_px): (f64, f64),
) -> Vec<SideLabel> {
    labels.retain(|label| !label.text.is_empty());
    labels.sort_by(|a, b| a.anchor.1.total_cmp(&b.anchor.1));
    share_lines(
        &mut labels,
        (bottom_px - top_px) / height_px,
        (size_px, room_px),
    );
    let wanted: Vec<f64> = labels.iter().map(|label| label.middle_px).collect();
    let middles = parted(&wanted, (top_px, bottom_px), height_px);
    for (label, middle_px) in labels.iter_mut().zip(middles) {
        label.middle_px = middle_px;
    }
    labels
}

/// Writes nearest neighbours on one line until no more lines are needed than there are.
fn share_lines(labels: &mut Vec<SideLabel>, lines: f64, (size_px, room_px): (f64, f64)) {
    if lines < 1.0 {
        labels.clear();
    }
    while labels.len() as f64 > lines {
        let nearest = (1..labels.len()).min_by(|a, b| {
            let distance = |at: usize| labels[at].anchor.1 - labels[at - 1].anchor.1;
            distance(*a).total_cmp(&distance(*b))
        });
        let Some(nearest) = nearest else { return };
        let second = labels.remove(nearest);
        let first = &mut labels[nearest - 1];
        // A text already cut short takes no more.
        if !first.text.ends_with('…') {
            let both = format!("{}, {}", first.text, second.text);
            first.text = fitted(&both, size_px, Weight::Regular, room_px);
        }
    }
}

/// Neighbours that overlap: they stand together where the mean of them wants to.
struct Block {
    count: usize,
    middle_px: f64,
}

/// Middles of boxes of one height, moved from the rising `wanted` ones until none overlaps and
/// all lie between two ends, which must leave room for all.
fn parted(wanted: &[f64], (top_px, bottom_px): (f64, f64), height_px: f64) -> Vec<f64> {
    let half = |count: usize| 0.5 * count as f64 * height_px;
    let mut blocks: Vec<Block> = Vec::new();
    for middle_px in wanted {
        let mut block = Block {
            count: 1,
            middle_px: *middle_px,
        };
        loop {
            let (low, high) = (top_px + half(block.count), bottom_px - half(block.count));
            block.middle_px = block.middle_px.max(low).min(high);
            let Some(above) = blocks.pop_if(|above| {
                above.middle_px + half(above.count) > block.middle_px - half(block.count)
            }) else {
                break;
            };
            let count = above.count + block.count;
            let sum = above.middle_px * above.count as f64 + block.middle_px * block.count as f64;
            block = Block {
                count,
                middle_px: sum / count as f64,
            };
        }
        blocks.push(block);
    }
    let places = blocks.iter().flat_map(|block| {
        let top_px = block.middle_px - half(block.count);
        (0..block.count).map(move |place| top_px + (place as f64 + 0.5) * height_px)
    });
    places.collect()
}

/// Where on which side of its point a label inside a plot would like to stand.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Side {
    /// Over it.
    #[default]
    Above,
    /// Under it.
    Below,
    /// To its left.
    Left,
    /// To its right.
    Right,
}

/// The inside of a plot as it fills with labels.
pub(crate) struct Crowd {
    plot: Rectangle,
    taken: Vec<Rectangle>,
    strokes: Vec<Vec<Point>>,
}

/// A label costs this many px of distance for every stroke that it would cover.
const COVER_COST_PX: f64 = 60.0;
/// Farthest that a label is moved from what it names, px.
const FARTHEST_PX: f64 = 110.0;

impl Crowd {
    /// A plot with its curves and nothing written in it yet.
    pub(crate) fn new(plot: Rectangle, strokes: Vec<Vec<Point>>) -> Self {
        Self {
            plot,
            taken: Vec::new(),
            strokes,
        }
    }

    /// A free box of this size as near as possible to a point and on the side asked for, where it
    /// covers as few curves as possible; none if there is no room within reach. The box is taken
    /// from then on.
    pub(crate) fn place(
        &mut self,
        at: Point,
        (width_px, height_px): (f64, f64),
        side: Side,
    ) -> Option<Rectangle> {
        let mut best: Option<(f64, Rectangle)> = None;
        for (distance_px, candidate) in candidates(at, width_px, height_px, side) {
            if best.is_some_and(|(cost, _)| cost <= distance_px) {
                break;
            }
            if !self.plot.contains(candidate)
                || self.taken.iter().any(|taken| taken.overlaps(candidate))
            {
                continue;
            }
            let cost = distance_px + COVER_COST_PX * self.covered(candidate);
            if best.is_none_or(|(least, _)| cost < least) {
                best = Some((cost, candidate));
            }
        }
        let (_, place) = best?;
        self.taken.push(place);
        Some(place)
    }

    /// How many strokes a box would cover.
    fn covered(&self, area: Rectangle) -> f64 {
        let covered = self.strokes.iter().filter(|stroke| {
            stroke
                .windows(2)
                .any(|pair| crosses(pair[0], pair[1], area))
        });
        covered.count() as f64
    }
}

/// Boxes around a point, the nearest and those on the wanted side first, each with what its place
/// costs in px.
fn candidates((x, y): Point, width_px: f64, height_px: f64, side: Side) -> Vec<(f64, Rectangle)> {
    const GAP_PX: f64 = 5.0;
    const STEP_PX: f64 = 7.0;
    let (wanted_x, wanted_y) = match side {
        Side::Above => (0.0, -1.0),
        Side::Below => (0.0, 1.0),
        Side::Left => (-1.0, 0.0),
        Side::Right => (1.0, 0.0),
    };
    let mut boxes = Vec::new();
    let mut ring_px = 0.0;
    while ring_px <= FARTHEST_PX {
        for (right, down) in [
            (0.0, -1.0),
            (0.0, 1.0),
            (-1.0, 0.0),
            (1.0, 0.0),
            (1.0, -1.0),
            (-1.0, -1.0),
            (1.0, 1.0),
            (-1.0, 1.0),
        ] {
            let reach_px = GAP_PX + ring_px;
            let middle_x = x + right * (0.5 * width_px + reach_px);
            let middle_y = y + down * (0.5 * height_px + reach_px);
            let against = 1.0 - (right * wanted_x + down * wanted_y);
            boxes.push((
                ring_px + 12.0 * against,
                Rectangle {
                    left_px: middle_x - 0.5 * width_px,
                    top_px: middle_y - 0.5 * height_px,
                    right_px: middle_x + 0.5 * width_px,
                    bottom_px: middle_y + 0.5 * height_px,
                },
            ));
        }
        ring_px += STEP_PX;
    }
    boxes.sort_by(|a, b| a.0.total_cmp(&b.0));
    boxes
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::figure::glyphs::width_px;
    use crate::sheet::figure::palette::BLACK;
    use proptest::prelude::*;

    fn label(text: &str, y: f64) -> SideLabel {
        SideLabel {
            text: text.to_owned(),
            rgb: BLACK,
            anchor: (0.0, y),
            middle_px: y,
        }
    }

    fn heights(labels: &[SideLabel]) -> Vec<f64> {
        labels.iter().map(|label| label.middle_px).collect()
    }

    #[test]
    fn labels_apart_stay_and_close_ones_part_evenly() {
        let labels = vec![label("a", 20.0), label("b", 50.0), label("c", 52.0)];
        let spread = spread(labels, (0.0, 100.0), 10.0, (12.0, 80.0));
        assert_eq!(heights(&spread), [20.0, 46.0, 56.0]);
    }

    #[test]
    fn a_block_at_the_edge_stays_inside() {
        let labels = vec![label("a", 98.0), label("b", 99.0)];
        let spread = spread(labels, (0.0, 100.0), 10.0, (12.0, 80.0));
        assert_eq!(heights(&spread), [85.0, 95.0]);
    }

    #[test]
    fn too_many_labels_share_lines() {
        let labels = vec![label("hh1", 10.0), label("hh2", 30.0), label("lh1", 31.0)];
        let spread = spread(labels, (0.0, 25.0), 10.0, (12.0, 80.0));
        let texts: Vec<_> = spread.iter().map(|label| label.text.as_str()).collect();
        assert_eq!(texts, ["hh1", "hh2, lh1"]);
    }

    #[test]
    fn a_label_avoids_curves_and_other_labels() {
        let plot = Rectangle {
            right_px: 200.0,
            bottom_px: 200.0,
            ..Rectangle::default()
        };
        let mut crowd = Crowd::new(plot, vec![vec![(0.0, 80.0), (200.0, 80.0)]]);
        // Just above the point the label would cover the curve: it goes over the curve.
        let first = crowd
            .place((100.0, 88.0), (30.0, 10.0), Side::Above)
            .expect("room");
        assert!(first.bottom_px < 80.0, "{first:?}");
        let second = crowd
            .place((100.0, 88.0), (30.0, 10.0), Side::Above)
            .expect("room");
        assert!(!first.overlaps(second));
        assert_eq!(
            crowd.place((100.0, 100.0), (300.0, 10.0), Side::Above),
            None
        );
    }

    proptest! {
        #[test]
        fn a_column_never_overlaps_or_overflows(
            wanted in prop::collection::vec(-50.0..250.0f64, 0..30),
            column_px in 5.0..300.0f64,
        ) {
            let labels = wanted.iter().map(|y| label("e1", *y)).collect();
            let spread = spread(labels, (0.0, column_px), 12.0, (10.0, 60.0));
            let heights = heights(&spread);
            prop_assert!(heights.windows(2).all(|pair| pair[1] - pair[0] > 12.0 - 1e-6));
            prop_assert!(heights.iter().all(|y| (6.0 - 1e-6..=column_px - 6.0 + 1e-6).contains(y)));
            prop_assert!(spread.iter().all(|label| width_px(&label.text, 10.0, Weight::Regular) <= 60.0));
            prop_assert_eq!(spread.is_empty(), wanted.is_empty() || column_px < 12.0);
        }
    }
}
