//! Names of curves beside samples of their lines, in rows over a plot.

use super::glyphs::{Weight, width_px};
use super::lettering::fitted;
use super::panel::{Key, Naming, Panel};
use super::scene::{Purpose, Rectangle, Scene, Shape, Stroke, Text, line_height_px};

const SIZE_PX: f64 = 12.0;
const ROW_PX: f64 = 18.0;
const SAMPLE_PX: f64 = 30.0;
/// Between a sample and its name, and between a name and the next sample.
const INNER_GAP_PX: f64 = 6.0;
const OUTER_GAP_PX: f64 = 20.0;
/// What does not fit into so many rows is only counted.
const MOST_ROWS: usize = 4;

/// Entries in rows of at most the width asked for.
pub(crate) struct Legend {
    rows: Vec<Vec<(Key, f64)>>,
}

impl Legend {
    /// The legend of a panel: its keys, then its curves named there, each name once.
    pub(crate) fn new(panel: &Panel, room_px: f64) -> Self {
        let curves = panel
            .curves
            .iter()
            .filter(|curve| curve.naming == Naming::Legend);
        let of_curves = curves.map(|curve| Key {
            name: curve.name.clone(),
            ink: curve.ink,
            dash: curve.dash,
            width_px: curve.width_px,
            mark: curve.mark,
            opacity: 0.0,
        });
        let name_room_px = room_px - SAMPLE_PX - INNER_GAP_PX;
        let mut keys: Vec<Key> = Vec::new();
        for mut key in panel.keys.iter().cloned().chain(of_curves) {
            key.name = fitted(&key.name, SIZE_PX, Weight::Regular, name_room_px);
            if !key.name.is_empty() && keys.iter().all(|other| other.name != key.name) {
                keys.push(key);
            }
        }
        let mut rows: Vec<Vec<(Key, f64)>> = Vec::new();
        let mut used_px = f64::INFINITY;
        let total = keys.len();
        for (index, key) in keys.into_iter().enumerate() {
            let width_px = entry_width_px(&key);
            if used_px + OUTER_GAP_PX + width_px > room_px {
                if rows.len() == MOST_ROWS {
                    count_rest(&mut rows, total - index, room_px);
                    break;
                }
                rows.push(Vec::new());
                used_px = -OUTER_GAP_PX;
            }
            if let Some(row) = rows.last_mut() {
                row.push((key, used_px + OUTER_GAP_PX));
            }
            used_px += OUTER_GAP_PX + width_px;
        }
        Self { rows }
    }

    /// Height of all rows, px.
    pub(crate) fn height_px(&self) -> f64 {
        self.rows.len() as f64 * ROW_PX
    }

    /// Draws the rows from a corner on.
    pub(crate) fn draw(&self, scene: &mut Scene, left_px: f64, top_px: f64) {
        for (row, entries) in self.rows.iter().enumerate() {
            let top_px = top_px + row as f64 * ROW_PX;
            for (key, offset_px) in entries {
                let left_px = left_px + offset_px;
                draw_sample(scene, key, left_px, top_px + 0.5 * line_height_px(SIZE_PX));
                let text_left_px = left_px + sample_width_px(key);
                scene.write(Text::hung(
                    key.name.clone(),
                    Purpose::Legend,
                    text_left_px,
                    top_px,
                    SIZE_PX,
                ));
            }
        }
    }
}

/// A key without line, mark or area is a word of explanation and needs no sample.
fn sample_width_px(key: &Key) -> f64 {
    if key.width_px > 0.0 || key.mark.is_some() || key.opacity > 0.0 {
        SAMPLE_PX + INNER_GAP_PX
    } else {
        0.0
    }
}

fn entry_width_px(key: &Key) -> f64 {
    sample_width_px(key) + width_px(&key.name, SIZE_PX, Weight::Regular)
}

/// Says at the end of the last row how many entries are not shown, in the place of as many as
/// that needs.
fn count_rest(rows: &mut [Vec<(Key, f64)>], mut missing: usize, room_px: f64) {
    let Some(row) = rows.last_mut() else { return };
    loop {
        let key = Key {
            name: format!("… and {missing} more"),
            ..Key::default()
        };
        let left_px = row.last().map_or(0.0, |(last, offset_px)| {
            offset_px + entry_width_px(last) + OUTER_GAP_PX
        });
        if left_px + entry_width_px(&key) <= room_px || row.is_empty() {
            row.push((key, left_px));
            return;
        }
        row.pop();
        missing += 1;
    }
}

fn draw_sample(scene: &mut Scene, key: &Key, left_px: f64, middle_px: f64) {
    if key.opacity > 0.0 {
        let sample = Rectangle {
            left_px,
            top_px: middle_px - 5.0,
            right_px: left_px + SAMPLE_PX,
            bottom_px: middle_px + 5.0,
        };
        scene.shapes.push(Shape::rectangle(
            sample,
            key.ink.rgb(),
            key.opacity.clamp(0.0, 1.0),
        ));
    }
    if key.width_px > 0.0 {
        let stroke = Stroke {
            rgb: key.ink.rgb(),
            width_px: key.width_px.clamp(0.5, 6.0),
            dash: key.dash,
        };
        let ends = [(left_px, middle_px), (left_px + SAMPLE_PX, middle_px)];
        scene.shapes.push(Shape::line(ends, stroke));
    }
    if let Some(mark) = key.mark {
        let at = (left_px + 0.5 * SAMPLE_PX, middle_px);
        scene.shapes.push(Shape::Mark {
            at,
            mark,
            size_px: 7.0,
            rgb: key.ink.rgb(),
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn panel_of(names: &[String]) -> Panel {
        let keys = names.iter().map(|name| Key {
            name: name.clone(),
            width_px: 2.0,
            ..Key::default()
        });
        Panel {
            keys: keys.collect(),
            ..Panel::default()
        }
    }

    fn names(legend: &Legend) -> Vec<&str> {
        legend
            .rows
            .iter()
            .flatten()
            .map(|(key, _)| key.name.as_str())
            .collect()
    }

    #[test]
    fn equal_names_stand_once_and_long_rows_wrap() {
        let given = ["TE", "TM", "TE", ""].map(str::to_owned);
        let legend = Legend::new(&panel_of(&given), 500.0);
        assert_eq!(names(&legend), ["TE", "TM"]);
        assert_eq!(legend.rows.len(), 1);
        assert_eq!(Legend::new(&panel_of(&given), 60.0).rows.len(), 2);
    }

    #[test]
    fn what_is_left_out_is_counted() {
        let given: Vec<String> = (0..100).map(|index| format!("curve {index}")).collect();
        let legend = Legend::new(&panel_of(&given), 400.0);
        let names = names(&legend);
        let last = names.last().expect("entries");
        let missing: usize = last
            .trim_start_matches("… and ")
            .trim_end_matches(" more")
            .parse()
            .expect("a count");
        assert_eq!(names.len() - 1 + missing, given.len());
        assert_eq!(legend.rows.len(), MOST_ROWS);
        for (key, offset_px) in legend.rows.iter().flatten() {
            assert!(offset_px + entry_width_px(key) <= 400.0);
        }
    }
}
