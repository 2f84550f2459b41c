//! What the words of a move mean.

use super::complaint::Complaint;
use crate::design::{Move, Quantity};
use crate::materials::Element;
use crate::source::nearest;

/// Bounds where none are given: what reactors grow and what stays coherent, common practice.
const THICKNESS_NM: (f64, f64) = (2.0, 15.0);
const STRAIN_PERCENT: (f64, f64) = (-1.5, 1.5);

/// A move: `well.thickness=4..12nm`, `well.In=0.1..0.3`, `well.strain=1%tensile..1.5%compressive`,
/// `well.gap=1200..1600nm`.
pub(super) fn one_move(flag: &str, words: &str) -> Result<Move, Complaint> {
    let unclear = |message: String, remedy: &str| {
        Complaint::usage(format!("{flag} {words}: {message}")).with_remedy(remedy)
    };
    let (number, bounds) = match words.split_once('=') {
        Some((number, bounds)) => (number.trim(), Some(bounds.trim())),
        None => (words.trim(), None),
    };
    let Some((name, what)) = number.rsplit_once('.') else {
        return Err(unclear(
            "it does not say which number moves".to_owned(),
            &format!(
                "{flag} well.thickness=4..12nm; after the dot thickness, strain, gap or an element"
            ),
        ));
    };
    let quantity = quantity(what).ok_or_else(|| {
        let known = ["thickness", "strain", "gap"]
            .into_iter()
            .chain(Element::ALL.map(Element::symbol));
        let remedy = nearest(what, known).map_or_else(
            || "one of thickness, strain, gap, or an element: Al, Ga, In, P, As, Sb".to_owned(),
            |near| format!("did you mean `{name}.{near}`?"),
        );
        unclear(format!("`{what}` is no number that can move"), &remedy)
    })?;
    let (from, to) = match (bounds, quantity) {
        (Some(bounds), _) => {
            range(quantity, bounds).map_err(|(message, remedy)| unclear(message, remedy))?
        }
        (None, Quantity::Thickness) => THICKNESS_NM,
        (None, Quantity::Share(_)) => (0.0, 1.0),
        (None, Quantity::Strain) => STRAIN_PERCENT,
        (None, Quantity::Gap) => {
            return Err(unclear(
                "it has no bounds".to_owned(),
                &format!("{flag} {name}.gap=1200..1600nm"),
            ));
        }
    };
    Ok(Move {
        name: name.to_owned(),
        quantity,
        from,
        to,
    })
}

fn quantity(what: &str) -> Option<Quantity> {
    match what {
        "thickness" | "thickness_nm" => Some(Quantity::Thickness),
        "strain" => Some(Quantity::Strain),
        "gap" | "gap_nm" => Some(Quantity::Gap),
        symbol => Element::from_symbol(symbol).map(Quantity::Share),
    }
}

/// Two bounds, the lower one first; a unit or sense that only the second has is that of both.
fn range(quantity: Quantity, words: &str) -> Result<(f64, f64), (String, &'static str)> {
    let form = match quantity {
        Quantity::Thickness => "two lengths with their unit: 4..12nm",
        Quantity::Gap => "two wavelengths with their unit: 1200..1600nm",
        Quantity::Share(_) => "two shares of the sublattice: 0.1..0.3",
        Quantity::Strain => {
            "two strains with their sense: 0..1.2%compressive, or 1%tensile..1.5%compressive"
        }
    };
    let Some((first, second)) = words.split_once("..") else {
        return Err(("a range has two dots between its ends".to_owned(), form));
    };
    let (first, second) = (Bound::read(first), Bound::read(second));
    let unit = |bound: &Bound| {
        if bound.unit.is_empty() {
            second.unit.clone()
        } else {
            bound.unit.clone()
        }
    };
    let value = |bound: &Bound| -> Result<f64, (String, &'static str)> {
        let number = bound
            .number
            .filter(|number| number.is_finite())
            .ok_or_else(|| (format!("`{}` is no number", bound.words), form))?;
        let unit = unit(bound);
        let wrong = || {
            let message = if unit.is_empty() {
                format!("`{}` has no unit", bound.words)
            } else {
                format!("`{unit}` is no unit of this number")
            };
            (message, form)
        };
        match quantity {
            Quantity::Thickness | Quantity::Gap if unit == "nm" => Ok(number),
            Quantity::Share(_) if unit.is_empty() => Ok(number),
            Quantity::Strain if number == 0.0 => Ok(0.0),
            Quantity::Strain if number < 0.0 => {
                Err(("a strain has a sense and no sign".to_owned(), form))
            }
            Quantity::Strain => match unit.as_str() {
                "%compressive" => Ok(-number),
                "%tensile" => Ok(number),
                _ => Err(wrong()),
            },
            _ => Err(wrong()),
        }
    };
    let ends = (value(&first)?, value(&second)?);
    let (from, to) = (ends.0.min(ends.1), ends.0.max(ends.1));
    if from < to {
        Ok((from, to))
    } else {
        Err(("both ends are the same".to_owned(), form))
    }
}

/// One end of a range.
struct Bound {
    words: String,
    number: Option<f64>,
    unit: String,
}

impl Bound {
    fn read(words: &str) -> Self {
        let words: String = words.split_whitespace().collect();
        // The longest head that is a number: `1e3nm` has an exponent, `4nm` a unit.
        let end = (0..=words.len())
            .rev()
            .filter(|&end| words.is_char_boundary(end))
            .find(|&end| {
                words[..end].parse::<f64>().is_ok()
                    && words[..end]
                        .ends_with(|letter: char| letter.is_ascii_digit() || letter == '.')
            });
        let (number, unit) = words.split_at(end.unwrap_or(0));
        Self {
            number: number.parse().ok(),
            unit: unit.to_owned(),
            words,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn moves_are_read() {
        for (words, name, quantity, from, to) in [
            (
                "well.thickness=4..12nm",
                "well",
                Quantity::Thickness,
                4.0,
                12.0,
            ),
            (
                "well.thickness=12nm..4nm",
                "well",
                Quantity::Thickness,
                4.0,
                12.0,
            ),
            (
                "well.In = 0.1 .. 0.3",
                "well",
                Quantity::Share(Element::In),
                0.1,
                0.3,
            ),
            (
                "In0.2Ga0.8As.In=.1..0.3",
                "In0.2Ga0.8As",
                Quantity::Share(Element::In),
                0.1,
                0.3,
            ),
            (
                "w.strain=1%tensile..1.5%compressive",
                "w",
                Quantity::Strain,
                -1.5,
                1.0,
            ),
            (
                "w.strain=0..1.2%compressive",
                "w",
                Quantity::Strain,
                -1.2,
                0.0,
            ),
            (
                "w.strain=0.5..1.2% tensile",
                "w",
                Quantity::Strain,
                0.5,
                1.2,
            ),
            ("b.gap=1.2e3..1600nm", "b", Quantity::Gap, 1200.0, 1600.0),
            ("well.In", "well", Quantity::Share(Element::In), 0.0, 1.0),
        ] {
            let got = one_move("--move", words).unwrap_or_else(|it| panic!("{words}: {it:?}"));
            let want = Move {
                name: name.to_owned(),
                quantity,
                from,
                to,
            };
            assert_eq!(got, want, "{words}");
        }
    }

    #[test]
    fn moves_without_sense_are_refused() {
        for words in [
            "",
            "well",
            "well.width=4..12nm",
            "well.thickness=4..12",
            "well.thickness=4-12nm",
            "well.thickness=4..12um",
            "well.thickness=5..5nm",
            "well.thickness=nan..5nm",
            "well.In=10..30%",
            "well.strain=1..2",
            "well.strain=1..2%",
            "well.strain=-1%tensile..2%tensile",
            "well.gap",
            "well.gap=ß..2nm",
        ] {
            assert!(one_move("--move", words).is_err(), "{words}");
        }
    }
}
