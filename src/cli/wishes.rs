//! What the flags mean.

use super::complaint::Complaint;
use super::flags::{Conditions, Output};
use super::outlet::{Files, print};
use crate::sheet::Stamp;
use crate::sheet::csv::CsvTable;
use crate::source::{nearest, one_of};
use crate::structure::{Bands, Overrides, Refusal, check_magnitude};
use crate::subbands::{Band, LARGEST_WAVE_NUMBER_PER_NM};
use crate::units::CELSIUS_ZERO_K;
use std::path::{Path, PathBuf};

/// Conditions that go before those of the file.
pub(super) fn overrides(flags: &Conditions) -> Result<Overrides, Complaint> {
    let bands = flags.bands.as_deref().map(bands).transpose()?;
    Ok(Overrides {
        temperature_k: flags.at.as_deref().map(temperature_k).transpose()?,
        densities_cm3: densities_cm3(&flags.density)?,
        bands,
    })
}

/// A temperature with its unit: `85C`, `358.15K`.
pub(super) fn temperature_k(word: &str) -> Result<f64, Complaint> {
    let unclear = |remedy: &str| {
        Complaint::usage(format!("--at: `{word}` is no temperature")).with_remedy(remedy)
    };
    let plain = word.trim();
    let digits = plain.trim_end_matches(|letter: char| letter.is_alphabetic() || letter == '°');
    let unit = plain[digits.len()..].trim_start_matches('°');
    let number: f64 = digits
        .trim()
        .parse()
        .map_err(|_| unclear("a number with its unit: 85C or 358.15K"))?;
    let kelvin = match unit {
        "C" | "c" => number + CELSIUS_ZERO_K,
        "K" | "k" => number,
        "" => {
            return Err(unclear(&format!("say which unit: {plain}C or {plain}K")));
        }
        _ => return Err(unclear("the unit is C or K: 85C or 358.15K")),
    };
    check_magnitude("temperature_k", kelvin).map_err(|refusal| refused("--at", word, &refusal))?;
    Ok(kelvin)
}

/// A wavelength with its unit: `1310nm`, `1.31um`.
pub(super) fn length_nm(flag: &str, word: &str) -> Result<f64, Complaint> {
    let unclear = |remedy: &str| {
        Complaint::usage(format!("{flag}: `{word}` is no wavelength")).with_remedy(remedy)
    };
    let plain = word.trim();
    let digits = plain.trim_end_matches(char::is_alphabetic);
    let number: f64 = digits
        .trim()
        .parse()
        .map_err(|_| unclear("a number with its unit: 1310nm"))?;
    let nm = match &plain[digits.len()..] {
        "nm" => number,
        "um" | "µm" | "μm" => 1e3 * number,
        "" => return Err(unclear(&format!("say which unit: {plain}nm"))),
        _ => return Err(unclear("the unit is nm or um: 1310nm")),
    };
    check_magnitude("wavelength_nm", nm).map_err(|refusal| refused(flag, word, &refusal))?;
    Ok(nm)
}

/// Densities, flags and lists together.
fn densities_cm3(words: &[String]) -> Result<Vec<f64>, Complaint> {
    words
        .iter()
        .flat_map(|list| list.split(','))
        .map(|word| {
            let density: f64 = word.trim().parse().map_err(|_| {
                Complaint::usage(format!("--density: `{word}` is no number"))
                    .with_remedy("carriers per cm^3 of the wells: 3e18, or a list 1e18,2e18")
            })?;
            check_magnitude("densities_cm3", density)
                .map_err(|refusal| refused("--density", word, &refusal))?;
            Ok(density)
        })
        .collect()
}

fn refused(flag: &str, word: &str, refusal: &Refusal) -> Complaint {
    Complaint::usage(format!("{flag} {word}: {}", refusal.message)).with_remedy(&refusal.help)
}

pub(super) fn bands(word: &str) -> Result<Bands, Complaint> {
    one("--bands", word, &[Bands::Mixed, Bands::Single], |it| {
        it.word()
    })
}

/// A matrix that `levels` can write.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Matrix {
    /// Of one band.
    Single(Band),
    /// Of one of the two blocks of mixed valence bands, +1 or −1, at an in-plane wave number, 1/nm.
    Valence { sign: f64, k_per_nm: f64 },
}

impl Matrix {
    /// Its word for `--matrix-of`.
    pub(super) fn word(self) -> &'static str {
        match self {
            Self::Single(Band::Electron) => "electron",
            Self::Single(Band::Heavy) => "heavy",
            Self::Single(Band::Light) => "light",
            Self::Valence { sign, .. } if sign > 0.0 => "valence",
            Self::Valence { .. } => "valence-mirror",
        }
    }

    /// What `--matrix-of` and `--at-k` ask for.
    pub(super) fn from_words(word: Option<&str>, at_k: Option<f64>) -> Result<Self, Complaint> {
        let k_per_nm = at_k.unwrap_or(0.0);
        if !(0.0..=LARGEST_WAVE_NUMBER_PER_NM).contains(&k_per_nm) {
            return Err(
                Complaint::usage(format!("--at-k {k_per_nm}: out of range")).with_remedy(format!(
                    "a wave number in the plane from 0 to {LARGEST_WAVE_NUMBER_PER_NM} per nm"
                )),
            );
        }
        let known = [
            Self::Single(Band::Electron),
            Self::Single(Band::Heavy),
            Self::Single(Band::Light),
            Self::Valence {
                sign: 1.0,
                k_per_nm,
            },
            Self::Valence {
                sign: -1.0,
                k_per_nm,
            },
        ];
        let matrix = word.map_or(Ok(known[0]), |word| {
            one("--matrix-of", word, &known, Self::word)
        })?;
        if let (Self::Single(_), Some(_)) = (matrix, at_k) {
            return Err(Complaint::usage(format!(
                "--at-k: the matrix of `{}` has no wave number in the plane",
                matrix.word()
            ))
            .with_remedy("leave it out, or take `--matrix-of valence`"));
        }
        Ok(matrix)
    }
}

/// One of some words.
pub(super) fn one<T: Copy>(
    flag: &str,
    word: &str,
    known: &[T],
    name: fn(T) -> &'static str,
) -> Result<T, Complaint> {
    let found = known.iter().copied().find(|&it| name(it) == word);
    found.ok_or_else(|| {
        let names = || known.iter().map(|&it| name(it));
        let complaint = Complaint::usage(format!("{flag}: `{word}` is not known"));
        complaint.with_remedy(nearest(word, names()).map_or_else(
            || format!("one of {}", one_of(names())),
            |near| format!("did you mean `{near}`?"),
        ))
    })
}

/// Where results go.
#[derive(Debug)]
pub(super) struct Destinations {
    pub(super) json: bool,
    pub(super) quiet: bool,
    csv: Option<Csv>,
    figure: Option<PathBuf>,
    matrix: Option<PathBuf>,
    files: Files,
}

#[derive(Debug)]
enum Csv {
    /// The principal table.
    File(PathBuf),
    /// Every table under its name.
    Folder(PathBuf),
}

/// Figures are SVG: a path that promises another kind of picture is refused.
fn require_svg(path: &Path) -> Result<(), Complaint> {
    let ending = path.extension().and_then(|ending| ending.to_str());
    if ending.is_some_and(|ending| ending.eq_ignore_ascii_case("svg")) {
        return Ok(());
    }
    let complaint = Complaint::usage(format!(
        "--figure: `{}` does not end in .svg, the one kind of picture that is written",
        path.display()
    ));
    Err(complaint.with_remedy(format!(
        "--figure {}; any browser shows it and prints it as PDF",
        path.with_extension("svg").display()
    )))
}

impl Destinations {
    /// Where the results of a command go; every file that is in the way is found now.
    ///
    /// # Arguments
    ///
    /// * `tables` – names of the tables that the command writes as CSV
    pub(super) fn new(
        flags: &Output,
        figure: Option<&Path>,
        matrix: Option<&Path>,
        tables: &[&str],
    ) -> Result<Self, Complaint> {
        let mut files = Files::new(flags.force);
        let csv = flags.csv.as_ref().map(|path| {
            let ends_like_a_folder = path.as_os_str().as_encoded_bytes().ends_with(b"/");
            if ends_like_a_folder || path.is_dir() {
                Csv::Folder(path.clone())
            } else {
                Csv::File(path.clone())
            }
        });
        match &csv {
            Some(Csv::File(path)) => files.announce(path, "--csv")?,
            Some(Csv::Folder(folder)) => {
                for table in tables {
                    files.announce_in_any_folder(&folder.join(format!("{table}.csv")), "--csv")?;
                }
            }
            None => {}
        }
        if let Some(path) = figure {
            require_svg(path)?;
        }
        for (path, flag) in [(figure, "--figure"), (matrix, "--matrix")] {
            if let Some(path) = path {
                files.announce(path, flag)?;
            }
        }
        Ok(Self {
            json: flags.json,
            quiet: flags.quiet,
            csv,
            figure: figure.map(Path::to_owned),
            matrix: matrix.map(Path::to_owned),
            files,
        })
    }

    /// Writes the tables, if they are wanted.
    pub(super) fn write_tables(
        &self,
        tables: impl FnOnce() -> Vec<CsvTable>,
        stamp: &Stamp,
    ) -> Result<(), Complaint> {
        match &self.csv {
            None => Ok(()),
            Some(Csv::File(path)) => tables()
                .first()
                .map_or(Ok(()), |table| self.files.write(path, &table.text(stamp))),
            Some(Csv::Folder(folder)) => {
                make_folder(folder)?;
                tables().iter().try_for_each(|table| {
                    let path = folder.join(format!("{}.csv", table.name));
                    self.files.write(&path, &table.text(stamp))
                })
            }
        }
    }

    /// The file that a table goes to, its folder made.
    pub(super) fn csv_path(&self, table: &str) -> Result<Option<PathBuf>, Complaint> {
        Ok(match &self.csv {
            None => None,
            Some(Csv::File(path)) => Some(path.clone()),
            Some(Csv::Folder(folder)) => {
                make_folder(folder)?;
                Some(folder.join(format!("{table}.csv")))
            }
        })
    }

    /// Writes one file.
    pub(super) fn write(&self, path: &Path, text: &str) -> Result<(), Complaint> {
        self.files.write(path, text)
    }

    /// Writes files into a folder, which is made where it is not there; all of them, or none if one
    /// is in the way.
    pub(super) fn write_folder(
        &mut self,
        folder: &Path,
        flag: &str,
        files: &[(String, &str)],
    ) -> Result<(), Complaint> {
        for (name, _) in files {
            self.files
                .announce_in_any_folder(&folder.join(name), flag)?;
        }
        make_folder(folder)?;
        files
            .iter()
            .try_for_each(|(name, text)| self.files.write(&folder.join(name), text))
    }

    /// Writes the matrix, if it is wanted.
    pub(super) fn write_matrix(&self, text: impl FnOnce() -> String) -> Result<(), Complaint> {
        let path = self.matrix.as_ref();
        path.map_or(Ok(()), |path| self.files.write(path, &text()))
    }

    /// Writes the figure, if it is wanted.
    pub(super) fn write_figure(&self, text: impl FnOnce() -> String) -> Result<(), Complaint> {
        let path = self.figure.as_ref();
        path.map_or(Ok(()), |path| self.files.write(path, &text()))
    }

    /// The result on standard output: the document, or the page.
    pub(super) fn print(
        &self,
        json: impl FnOnce() -> String,
        page: impl FnOnce() -> String,
    ) -> Result<(), Complaint> {
        print(&if self.json { json() } else { page() })
    }
}

pub(super) fn make_folder(folder: &Path) -> Result<(), Complaint> {
    std::fs::create_dir_all(folder).map_err(|error| {
        Complaint::new(
            super::Ending::Failed,
            format!("the folder `{}` can't be made: {error}", folder.display()),
        )
        .with_remedy(super::outlet::room_for_it(error.kind()))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn temperatures_are_read_with_their_units() {
        for (word, kelvin) in [
            ("85C", 358.15),
            ("85 °C", 358.15),
            ("358.15K", 358.15),
            ("-20c", 253.15),
            ("4.2 k", 4.2),
        ] {
            let got = temperature_k(word).unwrap_or_else(|it| panic!("{it:?}"));
            assert!((got - kelvin).abs() < 1e-9, "{word}: {got}");
        }
    }

    #[test]
    fn temperatures_without_sense_are_refused() {
        for word in ["", "85", "C", "85F", "-300C", "nanK", "infC", "1e9K", "ß"] {
            assert!(temperature_k(word).is_err(), "{word}");
        }
    }

    #[test]
    fn densities_come_from_flags_and_lists() {
        let words = ["1e18,2e18".to_owned(), "3e18".to_owned()];
        assert_eq!(densities_cm3(&words).expect("sound"), [1e18, 2e18, 3e18]);
        for word in ["", "1e18,", "-1e18", "nan", "3 e18", "1e40"] {
            assert!(densities_cm3(&[word.to_owned()]).is_err(), "{word}");
        }
    }
}
