//! Structures to start from, inside the program.

use super::Ending;
use super::complaint::Complaint;
use super::outlet::{Outlet, print};
use crate::sheet;
use crate::source::{nearest, one_of};

macro_rules! structure {
    ($name:literal) => {
        (
            $name,
            include_str!(concat!("../../structures/", $name, ".toml")),
        )
    };
}

/// Name and text of every structure in `structures/`.
const STRUCTURES: [(&str, &str); 9] = [
    structure!("estuary-660"),
    structure!("estuary-850"),
    structure!("estuary-980"),
    structure!("estuary-1310"),
    structure!("estuary-1550"),
    structure!("estuary-2300"),
    structure!("estuary-tensile"),
    structure!("estuary-bulk"),
    structure!("every-key"),
];

/// Name and text of what came back with a wafer of one of them.
const RETURNED: (&str, &str) = (
    "e-0417",
    include_str!("../../structures/returned/e-0417.toml"),
);

fn shipped() -> impl Iterator<Item = (&'static str, &'static str)> {
    STRUCTURES.into_iter().chain([RETURNED])
}

/// Names of the structures, and of what came back.
pub(super) fn names() -> impl Iterator<Item = &'static str> {
    shipped().map(|(name, _)| name)
}

/// `stepwell new`: the list, or one file as it is.
pub(super) fn write(name: Option<&str>, outlet: &Outlet) -> Result<Ending, Complaint> {
    let Some(name) = name else {
        let entries: Vec<_> = shipped()
            .map(|(name, text)| (name, purpose(text)))
            .collect();
        print(&sheet::starting_structures(&entries, outlet.colour()))?;
        return Ok(Ending::Done);
    };
    let plain = name.strip_suffix(".toml").unwrap_or(name);
    let Some((_, text)) = shipped().find(|(known, _)| *known == plain) else {
        let complaint = Complaint::usage(format!("there is no structure `{name}`"));
        return Err(complaint.with_remedy(nearest(plain, names()).map_or_else(
            || format!("one of {}", one_of(names())),
            |near| format!("did you mean `{near}`?"),
        )));
    };
    print(text)?;
    Ok(Ending::Done)
}

/// The first sentence of a structure's comment, without the line breaks.
fn purpose(text: &'static str) -> String {
    let comment: Vec<&str> = text
        .lines()
        .map_while(|line| line.strip_prefix('#'))
        .take_while(|line| !line.trim().is_empty())
        .map(str::trim)
        .collect();
    let comment = comment.join(" ");
    let end = comment.find(". ").map_or(comment.len(), |at| at + 1);
    comment[..end].trim_end_matches('.').to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_file_in_structures_is_shipped() {
        let mut files: Vec<String> = std::fs::read_dir("structures")
            .expect("the folder")
            .map(|entry| entry.expect("an entry").path())
            .filter(|path| path.extension().is_some_and(|it| it == "toml"))
            .filter_map(|path| Some(path.file_stem()?.to_str()?.to_owned()))
            .collect();
        let mut shipped: Vec<&str> = STRUCTURES.iter().map(|(name, _)| *name).collect();
        files.sort();
        shipped.sort_unstable();
        assert_eq!(files, shipped);
    }

    #[test]
    fn every_structure_says_what_it_is_for() {
        for (name, text) in shipped() {
            let purpose = purpose(text);
            assert!(
                (20..160).contains(&purpose.chars().count()),
                "{name}: {purpose}"
            );
        }
    }
}
