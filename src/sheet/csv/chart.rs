//! The table of a chart: written point by point, read back to go on or to be joined.

use crate::design::{Chart, ChartFigure, ChartPoint};
use crate::sheet::Stamp;
use crate::sheet::number::{exact, plain};

/// Heads of what stands beside the figure.
const BESIDE: [&str; 4] = [
    "well_tensile_percent",
    "critical_share_free",
    "critical_share_buried",
    "heavy_less_light_mev",
];

/// The table of a chart: one row a point; the two variables, the figure, and what is drawn beside
/// it.
#[derive(Debug)]
pub struct ChartTable<'a> {
    chart: &'a Chart<'a>,
    head: String,
}

impl<'a> ChartTable<'a> {
    /// The table of a chart.
    #[must_use]
    pub fn new(chart: &'a Chart<'a>, stamp: &Stamp) -> Self {
        let moves = &chart.variation.moves;
        let axes: Vec<String> = [(0, chart.points.0), (1, chart.points.1)]
            .map(|(index, count)| {
                let moved = &moves[index];
                format!(
                    "{} from {} to {} ({count})",
                    moved.key(),
                    plain(moved.said(moved.from)),
                    plain(moved.said(moved.to))
                )
            })
            .into();
        let mut heads = vec![
            moves[0].key(),
            moves[1].key(),
            chart.figure.key().to_owned(),
        ];
        if let Some(kind) = chart.target {
            heads.push(format!("target_{}_nm", kind.word()));
        }
        heads.extend(BESIDE.map(str::to_owned));
        Self {
            chart,
            head: format!(
                "# {}; chart of {} over {}\n{}\n",
                stamp.line(),
                chart.figure.key(),
                axes.join(" and "),
                heads.join(",")
            ),
        }
    }

    /// The lines before the first point.
    #[must_use]
    pub fn head(&self) -> String {
        self.head.clone()
    }

    /// The lines of points in order, from one on.
    #[must_use]
    pub fn rows(&self, from: usize, points: &[ChartPoint]) -> String {
        let cell = |value: Option<f64>| value.map_or_else(String::new, exact);
        points
            .iter()
            .enumerate()
            .map(|(index, point)| {
                let mut cells = self.place(from + index).to_vec();
                cells.push(cell(point.value));
                if self.chart.target.is_some() {
                    cells.push(cell(point.wavelength_nm));
                }
                cells.extend(
                    [
                        point.tensile_percent,
                        point.critical_share_free,
                        point.critical_share_buried,
                        point.heavy_less_light_mev,
                    ]
                    .map(cell),
                );
                cells.join(",") + "\n"
            })
            .collect()
    }

    /// The variables of a point as they stand in the table.
    fn place(&self, point: usize) -> [String; 2] {
        let (across, up) = self.chart.place(point);
        let moves = &self.chart.variation.moves;
        [moves[0].said(across), moves[1].said(up)].map(exact)
    }

    /// The points of a table, each with its number, in the order of the text.
    ///
    /// # Errors
    ///
    /// In words, if the text is not of this chart.
    pub fn read(&self, text: &str) -> Result<Vec<(usize, ChartPoint)>, String> {
        let rows = text
            .strip_prefix(self.head.as_str())
            .ok_or("it begins with another stamp or other columns")?;
        let mut points = Vec::new();
        let mut next = 0;
        for row in rows.lines() {
            let cells: Vec<&str> = row.split(',').collect();
            let expected = if self.chart.target.is_some() { 8 } else { 7 };
            if cells.len() != expected {
                return Err(format!("a row has {} cells", cells.len()));
            }
            // Points stand in order: the place is nearly always the next one.
            let is_here = |point: usize| self.place(point).iter().eq(&cells[..2]);
            let count = self.chart.count();
            let at = if next < count && is_here(next) {
                next
            } else {
                let found = (0..count).find(|&point| is_here(point));
                found.ok_or("a row is none of its points")?
            };
            next = at + 1;
            points.push((at, self.point(&cells[2..])?));
        }
        Ok(points)
    }

    fn point(&self, cells: &[&str]) -> Result<ChartPoint, String> {
        let number = |cell: &str| -> Result<Option<f64>, String> {
            if cell.is_empty() {
                return Ok(None);
            }
            let number = cell.parse().map_err(|_| format!("`{cell}` is no number"))?;
            Ok(Some(number))
        };
        let value = number(cells[0])?;
        let (wavelength_nm, rest) = if self.chart.target.is_some() {
            (number(cells[1])?, &cells[2..])
        } else {
            (None, &cells[1..])
        };
        let tensile_percent = number(rest[0])?;
        // A strained well without a critical thickness is beyond all of them: a blank.
        let share = |cell: &str| -> Result<Option<f64>, String> {
            Ok(number(cell)?.or(tensile_percent.map(|_| f64::INFINITY)))
        };
        let mut point = ChartPoint {
            value,
            wavelength_nm,
            tensile_percent,
            critical_share_free: share(rest[1])?,
            critical_share_buried: share(rest[2])?,
            heavy_less_light_mev: number(rest[3])?,
        };
        if self.chart.figure == ChartFigure::CriticalShare {
            point.value = point.critical_share_buried;
        }
        Ok(point)
    }
}
