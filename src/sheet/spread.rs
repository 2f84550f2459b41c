//! The page of the command `spread`.

mod figure;

pub use figure::spread_figure;

use super::levels::head;
use super::number::{fixed, plain, signed, significant};
use super::page::Page;
use super::stamp::Stamp;
use super::table::{Table, numbers, words};
use crate::design::{Cause, Spread};
use crate::source::Colour;
use crate::structure::{Bands, Stack};

/// Sensitivities, distribution and yield as text of 80 columns.
#[must_use]
pub fn spread(stack: &Stack, spread: &Spread, stamp: &Stamp, colour: Colour) -> String {
    let mut page = Page::new(colour);
    head(stack, &mut page);
    sensitivities(spread, &mut page);
    distribution(spread, &mut page);
    good(spread, &mut page);
    layers(spread, &mut page);
    trust(stack, spread, &mut page);
    stamp.write(&mut page);
    page.finish()
}

fn sensitivities(spread: &Spread, page: &mut Page) {
    page.heading("What one sigma of growth does");
    let mut table = Table::new([
        words("variable"),
        numbers("one sigma"),
        numbers("wavelength\nnm"),
        numbers("of the\nvariance\n%"),
    ]);
    for sensitivity in &spread.sensitivities {
        let variable = sensitivity.variable;
        table.row([
            variable.cause.name(),
            sigma(variable.cause, variable.sigma),
            signed(sensitivity.nm, 2),
            fixed(100.0 * sensitivity.share, 1),
        ]);
    }
    page.table(&table);
    page.paragraph(
        2,
        "A flux moves thickness and composition of every layer that holds its element; the growth \
         rate moves all thicknesses; the group-V fraction moves every layer that mixes two.",
    );
}

/// A sigma with its unit.
pub(super) fn sigma(cause: Cause, sigma: f64) -> String {
    match cause.unit() {
        "" => plain(sigma),
        unit => format!("{} {unit}", plain(sigma)),
    }
}

fn distribution(spread: &Spread, page: &mut Page) {
    page.heading("Wafers");
    page.pair(
        "wavelength",
        &format!(
            "{}, {} nm as designed",
            spread.request.kind.meaning(),
            fixed(spread.nominal_nm, 2)
        ),
    );
    let law = |moments: crate::design::Moments| {
        format!(
            "mean {} nm, sigma {} nm",
            fixed(moments.mean_nm, 2),
            significant(moments.sigma_nm, 3)
        )
    };
    page.pair("linear law", &law(spread.linear));
    page.pair(
        "random wafers",
        &format!("{} ({} drawn)", law(spread.sampled), spread.request.draws),
    );
    let quantiles: Vec<String> = spread
        .quantiles
        .iter()
        .map(|(share, nm)| format!("{}%: {}", plain(100.0 * share), fixed(*nm, 1)))
        .collect();
    page.pair("lie below, nm", &quantiles.join(" · "));
    if spread.lost > 0 {
        page.pair(
            "without a wavelength",
            &format!("{} wafers, counted as bad ones", spread.lost),
        );
    }
}

fn good(spread: &Spread, page: &mut Page) {
    page.heading("Yield");
    let Some(good) = spread.good else {
        page.paragraph(
            2,
            "No window: give [target] this `kind`, `wavelength_nm` and `tolerance_nm`.",
        );
        return;
    };
    let percent = |share: f64| format!("{} %", fixed(100.0 * share, 1));
    page.pair(
        "window",
        &format!(
            "{} ± {} nm in vacuum; the design lies {} nm from its middle",
            fixed(good.target_nm, 2),
            plain(good.tolerance_nm),
            signed(spread.nominal_nm - good.target_nm, 2)
        ),
    );
    page.pair(
        "good wafers",
        &format!(
            "{} ± {} by the wafers drawn, {} by the linear law",
            percent(good.sampled),
            percent(good.standard_error),
            percent(good.linear)
        ),
    );
    page.pair("if centred", &percent(good.centred));
    page.pair(
        "with model error",
        &format!(
            "{}: an error of {} nm of the calculated wavelength itself, which measuring one wafer \
             removes",
            percent(good.with_model),
            plain(spread.request.model_nm)
        ),
    );
    if let Some(wanted) = spread.wanted {
        let text = match (wanted.factor, wanted.sigma_nm) {
            (Some(factor), Some(sigma_nm)) => {
                let all: Vec<String> = spread
                    .sensitivities
                    .iter()
                    .map(|sensitivity| {
                        let variable = sensitivity.variable;
                        let scaled = factor * variable.sigma;
                        let shown = significant(scaled, 2);
                        let unit = match variable.cause.unit() {
                            "" => String::new(),
                            unit => format!(" {unit}"),
                        };
                        format!("{} {shown}{unit}", variable.cause.name())
                    })
                    .collect();
                format!(
                    "takes {} times these errors, a sigma of {} nm: {}",
                    significant(factor, 3),
                    significant(sigma_nm, 3),
                    all.join(", ")
                )
            }
            _ => "is out of reach with any errors: the design itself lies outside of the window"
                .to_owned(),
        };
        page.pair(&format!("{} good", percent(wanted.share)), &text);
        if let Some(factor) = wanted.factor_if_centred {
            page.pair(
                "if centred",
                &format!("{} times these errors do", significant(factor, 3)),
            );
        }
    }
}

fn layers(spread: &Spread, page: &mut Page) {
    page.heading("Layers");
    let mut table = Table::new([
        words("figure"),
        numbers("as designed"),
        numbers("one sigma"),
    ]);
    for layer in &spread.layers {
        let unit = match layer.unit {
            "" => String::new(),
            unit => format!(" {unit}"),
        };
        let decimals = if layer.unit.is_empty() { 4 } else { 3 };
        table.row([
            layer.name.clone(),
            format!("{}{unit}", fixed(layer.value, decimals)),
            format!("{}{unit}", significant(layer.sigma, 2)),
        ]);
    }
    page.table(&table);
}

fn trust(stack: &Stack, spread: &Spread, page: &mut Page) {
    page.heading("How it was computed");
    let Some(miss) = spread.miss else {
        page.paragraph(2, "Every wafer was solved in full.");
        return;
    };
    let through = match stack.model.bands {
        Bands::Single => format!("through {} solved structures", miss.solved),
        Bands::Mixed => format!(
            "through the design solved with mixed bands, its slopes and curvatures those of {} \
             structures by single bands",
            miss.solved
        ),
    };
    let unsolved = match miss.unsolved {
        0 => String::new(),
        1 => " One wafer more had no full solution.".to_owned(),
        more => format!(" {more} wafers more had no full solution."),
    };
    page.paragraph(
        2,
        &format!(
            "Wafers are read off a quadratic of all variables, cross terms included, {through}. \
             Against {} random wafers solved in full it misses by {} nm (root mean square), by {} nm \
             at most.{unsolved} --each-wafer solves every one.",
            miss.checked,
            significant(miss.rms_nm, 2),
            significant(miss.worst_nm, 2)
        ),
    );
}
