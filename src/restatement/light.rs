//! Photons, gaps and the widths of lines.

use super::{About, Quantity, ROOM_K, Restatement, Unclear};
use crate::materials::{Composition, Elements, Offsets, Parameters, solve_composition};
use crate::units::{HC_EV_NM, air, photon_ev, thermal_ev, wavelength_nm};

/// Temperature at which compositions are solved for, K.
const SOLVED_K: f64 = 300.0;
/// Rounds in which the gap at 300 K is found from one at another temperature; each leaves a
/// hundredth of the miss before it.
const ROUNDS: usize = 6;

/// A wavelength or a photon energy; of a gap also its bulk photoluminescence and its composition.
pub(super) fn photon(
    quantity: Quantity,
    about: &About,
    parameters: &Parameters,
) -> Result<Restatement, Unclear> {
    let vacuum_nm = match quantity {
        Quantity::Wavelength(nm) if about.in_air => air::vacuum_nm(nm),
        other => other
            .vacuum_nm()
            .ok_or_else(|| Unclear::new("this is no photon", "give nm or eV"))?,
    };
    let mut said = Restatement::default();
    let line = if about.is_photoluminescence {
        "photoluminescence peak"
    } else {
        "photon"
    };
    said_as_light(&mut said, line, vacuum_nm);
    said.number("wave number", 1e7 / vacuum_nm, "cm⁻¹");
    said.note("Air is dry, at 15 °C and 101325 Pa (Ciddor 1996); energies belong to the vacuum wavelength.");
    let kelvin = about.temperature_k.unwrap_or(ROOM_K);
    let shift_ev = 0.5 * thermal_ev(kelvin);
    let photon = photon_ev(vacuum_nm);
    let gap_ev = if about.is_photoluminescence {
        photon - shift_ev
    } else {
        photon
    };
    if gap_ev <= 0.0 {
        return Err(Unclear::new(
            "the peak lies below kT/2: there is no gap behind it",
            "check the wavelength and the temperature",
        ));
    }
    let at = format!("{kelvin} K");
    if about.is_photoluminescence {
        said_as_light(&mut said, &format!("gap at {at}"), wavelength_nm(gap_ev));
    } else {
        let peak_nm = wavelength_nm(gap_ev + shift_ev);
        said.number(
            format!("as a gap: bulk photoluminescence at {at}, vacuum"),
            peak_nm,
            "nm",
        );
    }
    said.note("Bulk photoluminescence peaks kT/2 above the gap: parabolic bands, low injection, no exciton.");
    if let Some(elements) = about.alloy {
        composition(&mut said, gap_ev, kelvin, elements, about, parameters)?;
    }
    Ok(said)
}

fn said_as_light(said: &mut Restatement, name: &str, vacuum_nm: f64) {
    said.number(format!("{name}, vacuum"), vacuum_nm, "nm");
    said.number(format!("{name}, air"), air::air_nm(vacuum_nm), "nm");
    said.number(format!("{name}, energy"), photon_ev(vacuum_nm), "eV");
}

/// The composition of a gap on a substrate.
fn composition(
    said: &mut Restatement,
    gap_ev: f64,
    kelvin: f64,
    elements: Elements,
    about: &About,
    parameters: &Parameters,
) -> Result<(), Unclear> {
    let Some(substrate) = &about.substrate else {
        return Err(Unclear::new(
            "a composition is found on a substrate",
            "name it: --on InP",
        ));
    };
    let lattice_nm = |kelvin: f64| {
        parameters
            .crystal(substrate, kelvin, Offsets::Table)
            .lattice_nm
    };
    let gap_at = |composition: &Composition, kelvin: f64| {
        parameters
            .crystal(composition, kelvin, Offsets::Table)
            .on(lattice_nm(kelvin))
            .gap_ev()
    };
    let solved = |gap_ev: f64| {
        solve_composition(
            parameters,
            &elements,
            lattice_nm(SOLVED_K),
            Some(wavelength_nm(gap_ev)),
            about.strain,
        )
        .map_err(|error| {
            let help = if elements.free_fractions() == 2 && about.strain.is_none() {
                "give its strain too: --strain matched, --strain 1%compressive".to_owned()
            } else {
                error.help()
            };
            Unclear::new(error.to_string(), help)
        })
    };
    let mut composition = solved(gap_ev)?;
    if (kelvin - SOLVED_K).abs() > 1e-9 {
        for _ in 0..ROUNDS {
            let shift_ev = gap_at(&composition, SOLVED_K) - gap_at(&composition, kelvin);
            composition = solved(gap_ev + shift_ev)?;
        }
    }
    said.words(
        format!("composition on {} (001)", substrate.formula()),
        composition.formula(),
    );
    for element in composition.elements().iter() {
        said.number(element.symbol(), composition.fraction(element), "");
    }
    let crystal = parameters.crystal(&composition, kelvin, Offsets::Table);
    let edges = crystal.on(lattice_nm(kelvin));
    said.number("its strained gap", edges.gap_ev(), "eV");
    said.number("its gap without strain", crystal.gap_ev, "eV");
    said.note("The gap is that of the strained bulk layer; alloys' gaps are known to 10 to 20 meV (common practice).");
    Ok(())
}

/// The width of a line: Δλ = λ² ΔE/(hc) and its inverse, taken at the half-height points.
pub(super) fn width(quantity: Quantity, line_nm: f64) -> Result<Restatement, Unclear> {
    let line_ev = photon_ev(line_nm);
    let (width_nm, width_ev) = match quantity {
        Quantity::Wavelength(nm) if nm < line_nm => {
            let (short, long) = (line_nm - 0.5 * nm, line_nm + 0.5 * nm);
            (nm, photon_ev(short) - photon_ev(long))
        }
        Quantity::Energy(ev) if ev < line_ev => {
            let (low, high) = (line_ev - 0.5 * ev, line_ev + 0.5 * ev);
            (wavelength_nm(low) - wavelength_nm(high), ev)
        }
        _ => {
            return Err(Unclear::new(
                "the width is as large as the line",
                "check both: 35nm --around 1310nm",
            ));
        }
    };
    let mut said = Restatement::default();
    said.number("width", width_nm, "nm");
    said.number("width", 1e3 * width_ev, "meV");
    said.number("around a line, vacuum", line_nm, "nm");
    said.number("around a line", line_ev, "eV");
    said.number(
        "meV per nm here",
        1e3 * HC_EV_NM / (line_nm * line_nm),
        "meV/nm",
    );
    said.note("The half-height points stand evenly about the line in the unit that was given.");
    Ok(said)
}
