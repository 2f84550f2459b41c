//! The page of the command `xray`.

use super::number::{ABSENT, fixed, length_nm, signed, temperature};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::diffraction::{COPPER_K_ALPHA1_NM, Diffraction, LayerPeak, MultiWell};
use crate::materials::Mismatch;
use crate::source::Colour;
use crate::structure::Stack;

/// Mismatch below this is what rounding leaves of a matched layer, ppm.
const LEAST_PPM: f64 = 0.5;

/// Peaks, satellites and fringes as text of 80 columns.
#[must_use]
pub fn xray(stack: &Stack, seen: &Diffraction, stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    page.heading(&stack.title);
    page.paragraph(
        2,
        &format!(
            "X-rays of Cu Kα1 ({} nm), reflection {}, ω–2θ scan; the wafer at {}",
            COPPER_K_ALPHA1_NM,
            seen.reflection,
            temperature(seen.temperature_k)
        ),
    );
    page.paragraph(
        2,
        &format!(
            "{} substrate: a {} nm, ω {}°, 2θ {}°",
            stack.substrate.formula(),
            fixed(seen.substrate_lattice_nm, 6),
            fixed(seen.substrate.theta_deg, 5),
            fixed(seen.substrate.two_theta_deg(), 5)
        ),
    );
    layers(seen, &mut page);
    if let Some(multi_well) = &seen.multi_well {
        satellites(multi_well, &mut page);
    } else {
        page.heading("Satellites");
        page.paragraph(
            2,
            "The wells do not repeat: there is no period, and no satellite.",
        );
    }
    page.heading("Fringes of the whole epitaxy");
    page.paragraph(
        2,
        &format!("{} arcsec of ω apart", fixed(seen.fringe_arcsec, 2)),
    );
    stamp.write(&mut page);
    page.finish()
}

/// A mismatch with its sense: `10012 compressive`, `0`.
fn ppm(size: f64) -> String {
    fixed(size, 0)
}

fn sense(mismatch: &Mismatch) -> String {
    if mismatch.relaxed_ppm() < LEAST_PPM {
        "matched".to_owned()
    } else {
        mismatch.sense().word().to_owned()
    }
}

fn layers(seen: &Diffraction, page: &mut Page) {
    page.heading("Layers, from the substrate up");
    let mut table = Table::new([
        words("layer"),
        words("material"),
        numbers("nm"),
        numbers("relaxed\nppm"),
        numbers("perpen-\ndicular\nppm"),
        words("sense"),
        numbers("peak\narcsec"),
    ]);
    for layer in &seen.layers {
        table.row(cells(layer));
    }
    page.table(&table);
    page.paragraph(
        2,
        "Mismatch, relaxed: of the free alloy, what a composition has; perpendicular: of the coherent layer, \
         what the reflection sees. Peaks are offsets in ω from the substrate's, left of it (minus) for \
         compressive layers; in 2θ they are twice as large.",
    );
}

fn cells(layer: &LayerPeak) -> [String; 7] {
    let role = match (layer.is_upper_end, layer.count) {
        (true, _) => "  graded to".to_owned(),
        (false, 1) => layer.role.word().to_owned(),
        (false, count) => format!("{count} × {}", layer.role.word()),
    };
    let of_layer = |text: String| {
        if layer.is_upper_end {
            String::new()
        } else {
            text
        }
    };
    [
        role,
        layer.formula.clone(),
        of_layer(length_nm(layer.thickness_nm)),
        ppm(layer.mismatch.relaxed_ppm()),
        ppm(layer.mismatch.perpendicular_ppm()),
        sense(&layer.mismatch),
        layer
            .peak
            .map_or(ABSENT.to_owned(), |peak| signed(peak.offset_arcsec, 1)),
    ]
}

fn satellites(multi_well: &MultiWell, page: &mut Page) {
    page.heading("Zero order and satellites");
    page.paragraph(
        2,
        &format!(
            "{} periods of {} nm; mean mismatch {} ppm perpendicular, {} ppm relaxed, {}",
            multi_well.periods,
            length_nm(multi_well.period_nm),
            ppm(multi_well.mean.perpendicular_ppm()),
            ppm(multi_well.mean.relaxed_ppm()),
            sense(&multi_well.mean)
        ),
    );
    let mut table = Table::new([
        words("order"),
        numbers("ω\n°"),
        numbers("2θ\n°"),
        numbers("offset in ω\narcsec"),
        numbers("relative\nintensity"),
    ]);
    for satellite in &multi_well.satellites {
        table.row([
            if satellite.order == 0 {
                "zero".to_owned()
            } else {
                signed(f64::from(satellite.order), 0)
            },
            fixed(satellite.peak.theta_deg, 5),
            fixed(satellite.peak.two_theta_deg(), 5),
            signed(satellite.peak.offset_arcsec, 1),
            format!("{:.1e}", satellite.intensity),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        &format!(
            "Satellites stand {} arcsec of ω apart at the zero order, fringes of all periods together \
             {} arcsec. Relative intensities are those of one period by itself (kinematical).",
            fixed(multi_well.spacing_arcsec, 1),
            fixed(multi_well.fringe_arcsec, 1)
        ),
    );
}
