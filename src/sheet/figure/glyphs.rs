//! How wide a text is set, without asking any font.
//!
//! A figure carries no font: the reader's machine chooses a sans-serif. So a text is measured with
//! the wider of two common ones for every glyph (the advance widths of `DejaVu Sans` and of
//! Liberation Sans, whose widths are those of Arial, read from the font files in 1/1000 em). A
//! narrower font then leaves a little air, and none runs out of its box.

/// Size of a raised or lowered figure relative to the text that it stands in.
pub(crate) const SCRIPT_SIZE: f64 = 0.7;

/// Bold glyphs are at most this much wider than regular ones (the capital I is the worst).
const BOLD_WIDENING: f64 = 1.3;

/// What a glyph missing from the table is given, em: half of an ideograph and a little more for
/// every column that it takes on a terminal. The writer forces such glyphs to that width.
const STRANGER_COLUMN_EM: f64 = 0.6;

/// Runs of neighbouring characters: the first, then the widths in 1/1000 em.
#[rustfmt::skip]
const WIDTHS: &[(char, &[u16])] = &[
    // space to ~
    ('\u{20}', &[
        318, 401, 460, 838, 637, 951, 780, 275, 391, 391, 500, 838, 318, 361, 318, 337,
        637, 637, 637, 637, 637, 637, 637, 637, 637, 637, 337, 337, 838, 838, 838, 557,
        1016, 685, 687, 723, 771, 667, 611, 778, 752, 295, 500, 667, 558, 863, 749, 788,
        667, 788, 723, 667, 611, 732, 685, 989, 686, 667, 686, 391, 337, 391, 838, 557,
        500, 613, 635, 550, 635, 616, 353, 635, 634, 278, 278, 580, 278, 975, 634, 612,
        635, 635, 412, 521, 393, 634, 592, 818, 592, 592, 525, 637, 337, 637, 838,
    ]),
    // no-break space to ÿ
    ('\u{a0}', &[
        318, 401, 637, 637, 637, 637, 337, 557, 500, 1000, 472, 612, 838, 361, 1000, 553,
        500, 838, 401, 401, 500, 637, 637, 318, 500, 401, 472, 612, 970, 970, 970, 611,
        685, 685, 685, 685, 685, 685, 1000, 723, 667, 667, 667, 667, 295, 295, 295, 295,
        775, 749, 788, 788, 788, 788, 788, 838, 788, 732, 732, 732, 732, 667, 667, 630,
        613, 613, 613, 613, 613, 613, 982, 550, 616, 616, 616, 616, 278, 278, 278, 278,
        612, 634, 612, 612, 612, 612, 612, 838, 612, 634, 634, 634, 634, 592, 635, 592,
    ]),
    // Ā to ſ
    ('\u{100}', &[
        685, 613, 685, 613, 685, 613, 723, 550, 723, 550, 723, 550, 723, 550, 771, 635,
        775, 635, 667, 616, 667, 616, 667, 616, 667, 616, 667, 616, 778, 635, 778, 635,
        778, 635, 778, 635, 752, 634, 917, 695, 295, 278, 295, 278, 295, 278, 295, 278,
        295, 278, 735, 556, 500, 278, 667, 580, 580, 558, 278, 558, 278, 558, 375, 558,
        430, 563, 285, 749, 634, 749, 634, 749, 634, 814, 749, 634, 788, 612, 788, 612,
        788, 612, 1070, 1023, 723, 412, 723, 412, 723, 412, 667, 521, 667, 521, 667, 521,
        667, 521, 611, 393, 611, 393, 611, 393, 732, 634, 732, 634, 732, 634, 732, 634,
        732, 634, 732, 634, 989, 818, 667, 592, 667, 686, 525, 686, 525, 686, 525, 353,
    ]),
    // Α to Ρ, Σ to Ω, α to ω
    ('\u{391}', &[
        685, 687, 558, 685, 667, 686, 752, 788, 295, 667, 685, 863, 749, 650, 788, 752, 667,
    ]),
    ('\u{3a3}', &[632, 611, 667, 798, 686, 836, 765]),
    ('\u{3b1}', &[
        660, 639, 592, 612, 541, 544, 634, 612, 339, 590, 592, 637, 559, 558, 612, 690, 635, 587,
        634, 603, 579, 660, 578, 713, 838,
    ]),
    // А to я
    ('\u{410}', &[
        685, 687, 687, 610, 782, 667, 1078, 642, 749, 749, 710, 752, 863, 752, 788, 752,
        667, 723, 611, 636, 861, 686, 777, 686, 1070, 1094, 833, 886, 687, 719, 1080, 723,
        613, 617, 590, 526, 692, 616, 901, 532, 650, 650, 605, 640, 755, 654, 612, 654,
        635, 550, 583, 592, 855, 592, 681, 591, 916, 942, 707, 790, 590, 549, 842, 602,
    ]),
    // thin and figure spaces, dashes, quotation marks, bullet, ellipsis, primes
    ('\u{2007}', &[637, 318, 200]),
    ('\u{2013}', &[557, 1000]),
    ('\u{2018}', &[318, 318, 318, 318, 519, 519, 519]),
    ('\u{2022}', &[590]),
    ('\u{2026}', &[1000]),
    ('\u{202f}', &[200]),
    ('\u{2032}', &[228, 374]),
    // arrows and signs
    ('\u{2190}', &[1000, 838, 1000, 838, 1000]),
    ('\u{2202}', &[518]),
    ('\u{2206}', &[669, 669]),
    ('\u{2212}', &[838, 838]),
    ('\u{221d}', &[715, 834]),
    ('\u{2225}', &[500]),
    ('\u{2248}', &[838]),
    ('\u{2260}', &[838]),
    ('\u{2264}', &[838, 838]),
    ('\u{22a5}', &[872]),
    ('\u{27e8}', &[391, 391]),
];

/// Regular or bold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Weight {
    Regular,
    Bold,
}

/// Where a character stands relative to the line of its text.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Level {
    Line,
    Raised,
    Lowered,
}

/// A character as it is set: `⁻` is a raised minus, `₀` a lowered 0. Set this way they look the
/// same in every font, where ready-made superscripts come from several fonts or none.
pub(crate) fn set(character: char) -> (Level, char) {
    const RAISED: &[(char, char)] = &[
        ('¹', '1'),
        ('²', '2'),
        ('³', '3'),
        ('⁰', '0'),
        ('⁴', '4'),
        ('⁵', '5'),
        ('⁶', '6'),
        ('⁷', '7'),
        ('⁸', '8'),
        ('⁹', '9'),
        ('⁺', '+'),
        ('⁻', '−'),
        ('⁽', '('),
        ('⁾', ')'),
        ('ⁿ', 'n'),
        ('ⁱ', 'i'),
    ];
    const LOWERED: &[(char, char)] = &[
        ('₀', '0'),
        ('₁', '1'),
        ('₂', '2'),
        ('₃', '3'),
        ('₄', '4'),
        ('₅', '5'),
        ('₆', '6'),
        ('₇', '7'),
        ('₈', '8'),
        ('₉', '9'),
        ('₊', '+'),
        ('₋', '−'),
        ('ₐ', 'a'),
        ('ₑ', 'e'),
        ('ₕ', 'h'),
        ('ᵢ', 'i'),
        ('ⱼ', 'j'),
        ('ₖ', 'k'),
        ('ₗ', 'l'),
        ('ₘ', 'm'),
        ('ₙ', 'n'),
        ('ₒ', 'o'),
        ('ₚ', 'p'),
        ('ᵣ', 'r'),
        ('ₛ', 's'),
        ('ₜ', 't'),
        ('ᵤ', 'u'),
        ('ᵥ', 'v'),
        ('ₓ', 'x'),
    ];
    let find = |pairs: &[(char, char)]| {
        pairs
            .iter()
            .find(|(script, _)| *script == character)
            .map(|(_, plain)| *plain)
    };
    if let Some(plain) = find(RAISED) {
        (Level::Raised, plain)
    } else if let Some(plain) = find(LOWERED) {
        (Level::Lowered, plain)
    } else {
        (Level::Line, character)
    }
}

/// Width of a character on the line, em; none if the table does not know it.
fn advance_em(character: char) -> Option<f64> {
    let code = u32::from(character);
    let listed = WIDTHS.iter().find_map(|(first, widths)| {
        let place = code.checked_sub(u32::from(*first))? as usize;
        widths.get(place).map(|width| f64::from(*width) / 1000.0)
    });
    // An accent stands on the letter before it.
    let accent = || (unicode_width::UnicodeWidthChar::width(character) == Some(0)).then_some(0.0);
    listed.or_else(accent)
}

/// Whether the table knows a glyph, so that its width needs no forcing.
pub(crate) fn is_known(character: char) -> bool {
    advance_em(set(character).1).is_some()
}

/// Width of one character at a font size, px.
pub(crate) fn character_width_px(character: char, size_px: f64, weight: Weight) -> f64 {
    let (level, plain) = set(character);
    let scale = if level == Level::Line {
        1.0
    } else {
        SCRIPT_SIZE
    };
    let widening = match weight {
        Weight::Regular => 1.0,
        Weight::Bold => BOLD_WIDENING,
    };
    let width_em = advance_em(plain).unwrap_or_else(|| {
        let columns = unicode_width::UnicodeWidthChar::width(plain).unwrap_or(1);
        STRANGER_COLUMN_EM * columns as f64
    });
    width_em * scale * widening * size_px
}

/// Width of a text on one line at a font size, px; never less than any common font gives it.
pub(crate) fn width_px(text: &str, size_px: f64, weight: Weight) -> f64 {
    text.chars()
        .map(|character| character_width_px(character, size_px, weight))
        .sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The digits of both fonts are 0.556 and 0.636 em wide, the minus 0.584 and 0.838 em: read
    /// with a font viewer.
    #[test]
    fn measures_the_wider_font() {
        assert!((width_px("10", 10.0, Weight::Regular) - 12.74).abs() < 1e-9);
        assert!((width_px("−", 10.0, Weight::Regular) - 8.38).abs() < 1e-9);
        assert!(width_px("gain", 10.0, Weight::Bold) > width_px("gain", 10.0, Weight::Regular));
    }

    #[test]
    fn raised_figures_are_narrower_and_set_as_plain_ones() {
        assert_eq!(set('⁻'), (Level::Raised, '−'));
        assert_eq!(set('ₜ'), (Level::Lowered, 't'));
        assert_eq!(set('m'), (Level::Line, 'm'));
        let ratio = width_px("¹⁸", 12.0, Weight::Regular) / width_px("18", 12.0, Weight::Regular);
        assert!((ratio - SCRIPT_SIZE).abs() < 1e-12);
    }

    #[test]
    fn runs_do_not_overlap_and_rise() {
        for pair in WIDTHS.windows(2) {
            let end = u32::from(pair[0].0) as usize + pair[0].1.len();
            assert!(end <= u32::from(pair[1].0) as usize, "{:?}", pair[1].0);
        }
    }

    #[test]
    fn knows_what_the_trade_writes() {
        let known = |text: &str| text.chars().all(is_known);
        assert!(known(
            "Gain (10¹⁸ cm⁻³) Γ λ µm Å ħω ≥ ≈ ∥ ⊥ · × – … ⟨e|hh⟩ Nₜᵣ g₀"
        ));
        assert!(known("e\u{301}"));
        assert!(!known("井"));
    }
}
