//! A map of photoluminescence over a wafer, as benches write it: comma-separated values in many
//! dialects. What is taken for granted is said; what has two readings is refused.

use crate::source::{Diagnostic, nearest};
use std::ops::Range;

/// Words that head a column of peak wavelengths.
const PEAK_WORDS: [&str; 6] = ["peak", "wavelength", "lambda", "wl", "λ", "pl"];
/// Wavelengths that a well may have, nm (common practice).
const POSSIBLE_NM: (f64, f64) = (300.0, 12_000.0);
/// Most points that are read.
const MOST_POINTS: usize = 1_000_000;

/// One point of the wafer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MapPoint {
    /// Position, in the unit of the map; `None` where the map has none.
    pub place: Option<(f64, f64)>,
    /// Peak wavelength in the medium of the bench, nm.
    pub peak_nm: f64,
}

/// A map.
#[derive(Clone, Debug, PartialEq)]
pub struct PhotoluminescenceMap {
    /// Points with a peak.
    pub points: Vec<MapPoint>,
    /// Rows without one.
    pub blank: usize,
    /// What was taken for granted, in words.
    pub assumptions: Vec<String>,
}

impl PhotoluminescenceMap {
    /// The peak below which half of the points lie, nm.
    #[must_use]
    pub fn median_nm(&self) -> f64 {
        let mut peaks: Vec<f64> = self.points.iter().map(|point| point.peak_nm).collect();
        peaks.sort_by(f64::total_cmp);
        let middle = peaks.len() / 2;
        if peaks.len() % 2 == 1 {
            peaks[middle]
        } else {
            0.5 * (peaks[middle - 1] + peaks[middle])
        }
    }

    /// Standard deviation over the points, nm; 0 of a single point.
    #[must_use]
    pub fn sigma_nm(&self) -> f64 {
        let count = self.points.len() as f64;
        let mean = self.points.iter().map(|point| point.peak_nm).sum::<f64>() / count;
        let squares: f64 = self
            .points
            .iter()
            .map(|point| (point.peak_nm - mean).powi(2))
            .sum();
        (squares / (count - 1.0).max(1.0)).sqrt()
    }

    /// Reads a map.
    ///
    /// # Errors
    ///
    /// A fault at its place where the text is no map, or has two readings.
    pub fn read(text: &str) -> Result<Self, Diagnostic> {
        let mut assumptions = Vec::new();
        let mut lines = lines(text).filter(|(_, line)| {
            let line = line.trim();
            !line.is_empty() && !line.starts_with('#')
        });
        let Some((head_at, head)) = lines.next() else {
            return Err(Diagnostic::new(0..0, "the map is empty")
                .with_help("a line of heads such as `x,y,peak_nm`, then one line a point"));
        };
        let head_span = head_at..head_at + head.len();
        let separator = separator(head, &head_span, &mut assumptions)?;
        let heads: Vec<&str> = split(head, separator);
        if heads.iter().all(|head| head.trim().parse::<f64>().is_ok()) {
            return Err(Diagnostic::new(
                head_span,
                "the first line holds numbers: the columns have no heads",
            )
            .with_help("write heads above them: `x,y,peak_nm`"));
        }
        let peak = peak_column(&heads, &head_span)?;
        let place = |name: &str| {
            let plain = |head: &&str| words(head).first().is_some_and(|word| word == name);
            heads.iter().position(plain)
        };
        let places = place("x").zip(place("y"));
        let mut map = Self {
            points: Vec::new(),
            blank: 0,
            assumptions: Vec::new(),
        };
        let mut decimal_comma = false;
        let mut written: Vec<Row> = Vec::new();
        for (at, line) in lines.take(MOST_POINTS) {
            let span = at..at + line.len();
            let cells = split(line, separator);
            if cells.len() != heads.len() {
                return Err(unequal(&span, cells.len(), heads.len(), separator));
            }
            if cells[peak].trim().is_empty() || cells[peak].trim().eq_ignore_ascii_case("nan") {
                map.blank += 1;
                continue;
            }
            let peak_value = number(cells[peak], &span, separator, &mut decimal_comma)?;
            let place = match places {
                Some((x, y)) => Some((
                    number(cells[x], &span, separator, &mut decimal_comma)?,
                    number(cells[y], &span, separator, &mut decimal_comma)?,
                )),
                None => None,
            };
            written.push((span, place, peak_value));
        }
        if decimal_comma {
            assumptions.push("decimal commas".to_owned());
        }
        if written.is_empty() {
            return Err(
                Diagnostic::new(head_span, "the map has no point with a peak")
                    .with_help("one line a point below the heads"),
            );
        }
        let factor = nm_per_unit(heads[peak], &written, &head_span, &mut assumptions)?;
        for (span, place, value) in written {
            let peak_nm = factor * value;
            if !(POSSIBLE_NM.0..=POSSIBLE_NM.1).contains(&peak_nm) {
                return Err(Diagnostic::new(
                    span,
                    format!("a peak of {peak_nm} nm is not possible"),
                )
                .with_help("check the column and its unit"));
            }
            map.points.push(MapPoint { place, peak_nm });
        }
        map.assumptions = assumptions;
        Ok(map)
    }
}

/// Lines with the byte at which each begins.
fn lines(text: &str) -> impl Iterator<Item = (usize, &str)> {
    let mut at = 0;
    text.split_inclusive('\n').map(move |line| {
        let start = at;
        at += line.len();
        (start, line.trim_end_matches(['\n', '\r']))
    })
}

fn split(line: &str, separator: char) -> Vec<&str> {
    line.split(separator)
        .map(|cell| cell.trim().trim_matches('"'))
        .collect()
}

/// What parts the cells: the semicolon or the tab where the heads have one, else the comma.
fn separator(
    head: &str,
    span: &Range<usize>,
    assumptions: &mut Vec<String>,
) -> Result<char, Diagnostic> {
    let has = |letter: char| head.contains(letter);
    match (has(';'), has('\t')) {
        (true, true) => Err(Diagnostic::new(
            span.clone(),
            "the heads are parted by semicolons and by tabs",
        )
        .with_help("part columns by one of them")),
        (true, false) => {
            assumptions.push("columns parted by semicolons".to_owned());
            Ok(';')
        }
        (false, true) => {
            assumptions.push("columns parted by tabs".to_owned());
            Ok('\t')
        }
        (false, false) => Ok(','),
    }
}

fn unequal(span: &Range<usize>, cells: usize, heads: usize, separator: char) -> Diagnostic {
    let message = format!("the line has {cells} cells below {heads} heads");
    let help = if separator == ',' && cells == 2 * heads {
        "commas seem to part cells and to be decimal as well: part cells by `;`"
    } else {
        "give each column a head and each line all its cells"
    };
    Diagnostic::new(span.clone(), message).with_help(help)
}

/// The words of a head in small letters, brackets and underscores parting them.
fn words(head: &str) -> Vec<String> {
    head.to_lowercase()
        .replace('μ', "µ")
        .split(|letter: char| !(letter.is_alphanumeric() || letter == 'µ'))
        .filter(|word| !word.is_empty())
        .map(str::to_owned)
        .collect()
}

fn peak_column(heads: &[&str], span: &Range<usize>) -> Result<usize, Diagnostic> {
    let rank = |head: &str| {
        let words = words(head);
        let width = ["fwhm", "width", "intensity", "int", "sigma"];
        if words.iter().any(|word| width.contains(&word.as_str())) {
            return None;
        }
        PEAK_WORDS
            .iter()
            .position(|known| words.iter().any(|word| word == known))
    };
    let found: Vec<usize> = (0..heads.len())
        .filter(|&column| rank(heads[column]).is_some())
        .collect();
    match found.as_slice() {
        [column] => Ok(*column),
        [] => {
            let near = heads.iter().find(|head| {
                words(head)
                    .iter()
                    .any(|word| nearest(word, PEAK_WORDS).is_some())
            });
            let help = near.map_or_else(
                || "head it `peak_nm`".to_owned(),
                |head| format!("is it `{head}`? head it `peak_nm`"),
            );
            Err(
                Diagnostic::new(span.clone(), "no column is headed as the peak wavelength")
                    .with_help(help),
            )
        }
        several => {
            let names: Vec<String> = several
                .iter()
                .map(|&column| format!("`{}`", heads[column]))
                .collect();
            Err(Diagnostic::new(
                span.clone(),
                format!("several columns may be the peak: {}", names.join(", ")),
            )
            .with_help("head the one that is meant `peak_nm`, and the others otherwise"))
        }
    }
}

/// A number of a cell. A comma in it is decimal where it can't part cells.
fn number(
    cell: &str,
    span: &Range<usize>,
    separator: char,
    decimal_comma: &mut bool,
) -> Result<f64, Diagnostic> {
    let cell = cell.trim().replace('\u{2212}', "-");
    if cell.contains(',') && cell.contains('.') {
        return Err(Diagnostic::new(
            span.clone(),
            format!("`{cell}` has a comma and a point: which is decimal?"),
        )
        .with_help("leave thousands unmarked"));
    }
    let plain = if separator != ',' && cell.contains(',') {
        *decimal_comma = true;
        cell.replace(',', ".")
    } else {
        cell.clone()
    };
    match plain.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok(value),
        _ => Err(
            Diagnostic::new(span.clone(), format!("`{cell}` is no number"))
                .with_help("leave a cell without a value blank"),
        ),
    }
}

/// One row as written: where it stands, the place on the wafer, the peak.
type Row = (Range<usize>, Option<(f64, f64)>, f64);

/// From the unit of the peaks to nm: as the head says, else by what the numbers can be.
fn nm_per_unit(
    head: &str,
    written: &[Row],
    span: &Range<usize>,
    assumptions: &mut Vec<String>,
) -> Result<f64, Diagnostic> {
    let words = words(head);
    let said = |units: &[&str]| words.iter().any(|word| units.contains(&word.as_str()));
    if said(&["nm"]) {
        return Ok(1.0);
    }
    if said(&["um", "µm", "micron", "microns"]) {
        return Ok(1e3);
    }
    if said(&["a", "å", "angstrom", "ev", "mev"]) {
        return Err(
            Diagnostic::new(span.clone(), format!("`{head}` is not in nm or um"))
                .with_help("write wavelengths in nm"),
        );
    }
    let all = |low: f64, high: f64| {
        written
            .iter()
            .all(|(_, _, value)| (low..=high).contains(value))
    };
    if all(POSSIBLE_NM.0, 5000.0) {
        assumptions.push("peaks in nm, by their size".to_owned());
        Ok(1.0)
    } else if all(0.3, 12.0) {
        assumptions.push("peaks in um, by their size".to_owned());
        Ok(1e3)
    } else {
        Err(Diagnostic::new(
            span.clone(),
            format!("`{head}` does not say its unit, and its numbers fit more than one"),
        )
        .with_help("head it `peak_nm`, with wavelengths in nm"))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str) -> PhotoluminescenceMap {
        PhotoluminescenceMap::read(text).unwrap_or_else(|fault| panic!("{fault:?}"))
    }

    fn refused(text: &str) -> String {
        PhotoluminescenceMap::read(text)
            .expect_err("no map")
            .message
    }

    #[test]
    fn dialects_of_one_map_give_one_map() {
        let plain = read("x,y,peak_nm\n0,0,1310.5\n10,0,1311.5\n");
        assert!(plain.assumptions.is_empty());
        let german = read("x;y;Peak (nm)\r\n0,0;0,0;1310,5\r\n10,0;0,0;1311,5\r\n");
        let microns = read("X (mm)\tY (mm)\tlambda [μm]\n0\t0\t1.3105\n10\t0\t1.3115\n");
        let silent = read("# bench 2\nx,y,wavelength\n0,0,1310.5\n10,0,1311.5\n");
        for map in [&german, &microns, &silent] {
            assert!((map.median_nm() - 1311.0).abs() < 1e-9);
            assert!((map.sigma_nm() - 0.5f64.sqrt()).abs() < 1e-9);
            assert_eq!(map.points[1].place, Some((10.0, 0.0)));
        }
        assert_eq!(german.assumptions.len(), 2);
        assert_eq!(silent.assumptions, ["peaks in nm, by their size"]);
    }

    #[test]
    fn points_without_a_peak_are_counted_and_other_columns_left_alone() {
        let map = read("x,y,peak_nm,FWHM_peak_meV\n0,0,1310,30\n1,0,,\n2,0,NaN,\n");
        assert_eq!((map.points.len(), map.blank), (1, 2));
    }

    #[test]
    fn what_has_two_readings_is_refused() {
        for (text, message) in [
            ("", "empty"),
            ("0,0,1310\n", "no heads"),
            ("x,y,peak\n0,5,0,0,1310,5\n", "6 cells below 3 heads"),
            ("x;y;peak\n0;0;1.310,5\n", "a comma and a point"),
            ("x,y,peak\n0,0,13105\n", "fit more than one"),
            ("x,y,peak_a,peak_b\n0,0,1,1\n", "several columns"),
            ("x,y,colour\n0,0,1310\n", "no column"),
            ("x,y,peak_nm\n0,0,13\n", "not possible"),
            ("x,y,peak_nm\n0,0,long\n", "no number"),
        ] {
            let got = refused(text);
            assert!(got.contains(message), "{text:?}: {got}");
        }
    }
}
