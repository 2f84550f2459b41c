//! The page of the command `spectrum`.

use super::levels::head;
use super::number::{ABSENT, fixed, plain, power, significant};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers};
use crate::evaluation::{Evaluation, GainPeak, PL_DENSITY_CM3, Spectrum};
use crate::source::Colour;

/// Gain and emission by density with their landmarks, as text of 80 columns.
#[must_use]
pub fn spectrum(
    evaluation: &Evaluation<'_>,
    spectrum: &Spectrum,
    stamp: &Stamp,
    colour: Colour,
) -> String {
    let mut page = Page::new(colour);
    head(evaluation.stack, &mut page);
    by_density(spectrum, &mut page);
    landmarks(evaluation, spectrum, &mut page);
    terms(evaluation, &mut page);
    stamp.write(&mut page);
    page.finish()
}

fn by_density(spectrum: &Spectrum, page: &mut Page) {
    page.heading("By carrier density");
    let mut table = Table::new([
        numbers("density\ncm⁻³"),
        numbers("sheet\ncm⁻²"),
        numbers("gap\nshrinks\nmeV"),
        numbers("quasi-\nFermi\nsplit\neV"),
        numbers("TE\ngain\ncm⁻¹"),
        numbers("at\nnm"),
        numbers("TM\ngain\ncm⁻¹"),
        numbers("at\nnm"),
        numbers("emis-\nsion\nat nm"),
        numbers("radi-\native\nA/cm²"),
    ]);
    let gain = |peak: Option<GainPeak>| {
        peak.map_or([ABSENT.to_owned(), ABSENT.to_owned()], |peak| {
            [fixed(peak.gain_cm, 0), fixed(peak.peak_nm, 1)]
        })
    };
    for run in &spectrum.runs {
        let [te, te_nm] = gain(run.te);
        let [tm, tm_nm] = gain(run.tm);
        let emission = run.spontaneous;
        table.row([
            power(run.density_cm3, 3),
            power(run.sheet_density_cm2, 3),
            fixed(run.shrinkage_mev, 1),
            fixed(run.splitting_ev, 4),
            te,
            te_nm,
            tm,
            tm_nm,
            emission.map_or(ABSENT.to_owned(), |it| fixed(it.peak_nm, 1)),
            emission.map_or(ABSENT.to_owned(), |it| significant(it.current_a_cm2, 3)),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        "Densities are of pairs per volume of the wells; sheet densities and radiative currents are of \
         all wells together. Gain is that of the well material, not yet times a confinement factor. \
         Wavelengths are in vacuum, with gap shrinkage.",
    );
}

fn landmarks(evaluation: &Evaluation<'_>, spectrum: &Spectrum, page: &mut Page) {
    page.heading("Landmarks");
    page.pair(
        "first transition",
        &format!(
            "{} nm without gap shrinkage",
            fixed(evaluation.emission().first_transition_nm, 2)
        ),
    );
    page.pair(
        "transparency",
        &spectrum.transparency.map_or_else(
            || "at no density from 1e10 to 1e22 cm⁻³".to_owned(),
            |at| {
                format!(
                    "{} cm⁻³, where the first transition with shrinkage is at {} nm",
                    power(at.density_cm3, 4),
                    fixed(at.wavelength_nm, 1)
                )
            },
        ),
    );
    page.pair(
        "logarithmic law",
        &spectrum.fit.map_or_else(
            || "none: it takes two densities with gain that rises".to_owned(),
            |(polarisation, fit)| {
                format!(
                    "peak {polarisation} gain = {} cm⁻¹ × ln(N / {} cm⁻³), missing the table by {} cm⁻¹ (root mean square)",
                    significant(fit.g0_cm, 4),
                    power(fit.transparency_cm3, 4),
                    significant(fit.residual_cm, 2)
                )
            },
        ),
    );
    page.pair(
        "photoluminescence",
        &spectrum.pl.map_or_else(
            || ABSENT.to_owned(),
            |pl| {
                format!(
                    "peak {} nm, full width at half maximum {} meV, at {} cm⁻³ without shrinkage",
                    fixed(pl.peak_nm, 2),
                    fixed(pl.fwhm_mev, 1),
                    power(PL_DENSITY_CM3, 1)
                )
            },
        ),
    );
}

/// Which terms of the model were on.
fn terms(evaluation: &Evaluation<'_>, page: &mut Page) {
    let model = &evaluation.stack.model;
    page.heading("Terms");
    page.pair(
        "valence bands",
        match model.bands {
            crate::structure::Bands::Single => "heavy and light holes, each by itself",
            crate::structure::Bands::Mixed => "heavy, light and split-off holes mixed",
        },
    );
    page.pair(
        "electron mass",
        if model.nonparabolic {
            "rising with energy"
        } else {
            "constant"
        },
    );
    page.pair(
        "line",
        &format!(
            "{}, half width {} meV at half maximum ({} fs)",
            model.lineshape.word(),
            fixed(1e3 * evaluation.line_half_width_ev(), 2),
            plain(model.intraband_fs)
        ),
    );
    page.pair(
        "gap shrinkage",
        &if model.shrinkage_mev > 0.0 {
            format!(
                "{} meV at 1e18 cm⁻³, growing with the cube root of density",
                plain(model.shrinkage_mev)
            )
        } else {
            "off".to_owned()
        },
    );
    let net = evaluation.doping.net_cm3;
    page.pair(
        "doping of the wells",
        &if net == 0.0 {
            "none".to_owned()
        } else {
            let kind = if net > 0.0 { "donors" } else { "acceptors" };
            format!(
                "{} cm⁻³ net of {kind}, per volume of the wells",
                power(net.abs(), 4)
            )
        },
    );
    page.pair(
        "field",
        &if model.field_kv_cm == 0.0 {
            "none".to_owned()
        } else {
            format!("{} kV/cm along growth", plain(model.field_kv_cm))
        },
    );
    if let Ok(index) = evaluation.refractive_index() {
        let source = if model.index.is_some() {
            "as given"
        } else {
            "by its model"
        };
        page.pair("refractive index", &format!("{} {source}", fixed(index, 3)));
    }
    page.pair(
        "left out",
        "attraction of electrons and holes, carriers above the barriers, mixing of alloys at interfaces",
    );
}
