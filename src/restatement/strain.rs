//! Mismatches and strains.

use super::{About, ROOM_K, Restatement, Unclear, with_sense};
use crate::materials::{Mismatch, Offsets, Parameters, Sense};

/// The two kinds of mismatch.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// Of the free alloy: what a composition has.
    Relaxed,
    /// Of the coherent layer along growth: what X-rays see.
    Perpendicular,
}

impl Kind {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Relaxed, Self::Perpendicular];

    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Relaxed => "relaxed",
            Self::Perpendicular => "perpendicular",
        }
    }
}

/// C12/C11 of the layer, and a note on whose it is.
fn stiffness_ratio(about: &About, parameters: &Parameters) -> Result<(f64, String), Unclear> {
    let kelvin = about.temperature_k.unwrap_or(ROOM_K);
    let ratio = |composition| {
        let crystal = parameters.crystal(composition, kelvin, Offsets::Table);
        crystal.c12_gpa / crystal.c11_gpa
    };
    match (&about.layer, &about.substrate) {
        (Some(layer), _) => Ok((ratio(layer), format!("Stiffness of {}.", layer.formula()))),
        (None, Some(substrate)) => Ok((
            ratio(substrate),
            format!(
                "Stiffness of the substrate {}, since no layer is named: that of an alloy on it moves the other \
                 kind by up to some 3 %.",
                substrate.formula()
            ),
        )),
        (None, None) => Err(Unclear::new(
            "what the planes of a strained layer do hangs on its stiffness",
            "name the substrate, --on InP, or the layer: --layer In0.6Ga0.4As",
        )),
    }
}

/// The senses that are meant: both where none is said.
fn senses(sense: Option<Sense>) -> Vec<Sense> {
    sense.map_or(vec![Sense::Compressive, Sense::Tensile], |sense| {
        vec![sense]
    })
}

fn signed(size: f64, sense: Sense) -> f64 {
    if sense == Sense::Tensile { -size } else { size }
}

/// A mismatch of one kind.
pub(super) fn mismatch(
    ppm: f64,
    sense: Option<Sense>,
    about: &About,
    parameters: &Parameters,
) -> Result<Restatement, Unclear> {
    let Some(kind) = about.kind else {
        return Err(Unclear::new(
            "a mismatch in ppm has two kinds that differ by a factor near 2",
            "say which: --mismatch relaxed, of the free alloy, or --mismatch perpendicular, what X-rays see",
        ));
    };
    let (ratio, whose) = stiffness_ratio(about, parameters)?;
    let mut said = Restatement::default();
    for sense in senses(sense) {
        let size = signed(1e-6 * ppm, sense);
        let mismatch = match kind {
            Kind::Relaxed => Mismatch::from_relaxed(size, ratio),
            Kind::Perpendicular => Mismatch::from_perpendicular(size, ratio),
        };
        say(&mut said, &mismatch, sense);
    }
    finish(&mut said, ratio, whose, sense);
    Ok(said)
}

/// An in-plane strain.
pub(super) fn strain(
    percent: f64,
    sense: Option<Sense>,
    about: &About,
    parameters: &Parameters,
) -> Result<Restatement, Unclear> {
    let (ratio, whose) = stiffness_ratio(about, parameters)?;
    let mut said = Restatement::default();
    for sense in senses(sense) {
        // ε∥ = −f/(1 + f), compressive where f > 0.
        let in_plane = -signed(1e-2 * percent, sense);
        let mismatch = Mismatch::from_relaxed(-in_plane / (1.0 + in_plane), ratio);
        say(&mut said, &mismatch, sense);
    }
    finish(&mut said, ratio, whose, sense);
    Ok(said)
}

fn say(said: &mut Restatement, mismatch: &Mismatch, sense: Sense) {
    said.number(
        with_sense("relaxed mismatch", sense),
        mismatch.relaxed_ppm(),
        "ppm",
    );
    said.number(
        with_sense("perpendicular mismatch", sense),
        mismatch.perpendicular_ppm(),
        "ppm",
    );
    said.number(
        with_sense("in-plane strain", sense),
        mismatch.strain_percent(),
        "%",
    );
}

fn finish(said: &mut Restatement, ratio: f64, whose: String, sense: Option<Sense>) {
    said.number("perpendicular over relaxed", 1.0 + 2.0 * ratio, "");
    said.note(whose);
    said.note(
        "Compressive: the free layer is wider than the substrate, its X-ray peak lies at the smaller angle. \
         Strain is counted from the layer's own constant, mismatch from the substrate's.",
    );
    if sense.is_none() {
        said.note("No sense is said: both are shown. Say it behind the unit: 850ppm compressive.");
    }
}
