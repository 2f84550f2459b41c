//! The table `[growth]`: by how much growth varies from run to run.

use super::file::map;
use super::keys::{Key, Kind, Table, number};
use super::number::exact;
use super::reader::{Field, Findings, Values, value};
use crate::materials::Element;
use crate::source::Diagnostic;
use std::fmt::Write as _;

/// One-sigma errors of the growth variables, independent of each other.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Growth {
    /// Of the rate that all layers have in common (time, rotation, total flow), %.
    pub rate_percent: f64,
    /// Of the flux of each group-III element.
    pub flux_percent: Fluxes,
    /// Of the fraction of the heaviest group-V element in a well that mixes two of them.
    pub group_v_fraction: f64,
    /// Of the growth temperature, K.
    pub temperature_k: f64,
    /// What one kelvin more does to the incorporation of each group-III element, %.
    pub flux_percent_per_k: Fluxes,
    /// What one kelvin more does to the fraction of the heaviest group-V element in such a well.
    pub group_v_fraction_per_k: f64,
    /// Of the model itself, nm; `None` where the file does not say.
    pub model_nm: Option<f64>,
}

/// One number for each group-III element, %.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Fluxes {
    /// Of aluminium.
    pub al: f64,
    /// Of gallium.
    pub ga: f64,
    /// Of indium.
    pub indium: f64,
}

impl Fluxes {
    /// In the order of [`GROUP_III`].
    #[must_use]
    pub fn in_order(&self) -> [f64; 3] {
        [self.al, self.ga, self.indium]
    }
}

/// The group-III elements in the order of formulas.
pub const GROUP_III: [Element; 3] = [Element::Al, Element::Ga, Element::In];

/// `[growth]`.
pub(super) static GROWTH: Table = Table {
    path: "growth",
    doc: "One-sigma errors of growth from run to run, for `spread`; what is left out does not vary.",
    keys: &[
        Key {
            name: "rate_percent",
            kind: number("%", (0.0, 30.0), (0.1, 5.0)),
            default: "0",
            doc: "of the growth rate that all layers have in common",
        },
        Key {
            name: "flux_percent",
            kind: Kind::Table(&FLUXES),
            default: "",
            doc: "of the flux of each group-III element: { In = 0.5, Ga = 0.5, Al = 0.5 }",
        },
        Key {
            name: "group_v_fraction",
            kind: number("", (0.0, 0.2), (1e-4, 0.03)),
            default: "0",
            doc: "of the fraction of the heaviest group-V element in a well that mixes two",
        },
        Key {
            name: "temperature_k",
            kind: number("K", (0.0, 50.0), (0.1, 10.0)),
            default: "0",
            doc: "of the growth temperature; say what it does with the two keys below",
        },
        Key {
            name: "flux_percent_per_k",
            kind: Kind::Table(&FLUXES_PER_K),
            default: "",
            doc: "what one kelvin more does to the incorporation of each group-III element",
        },
        Key {
            name: "group_v_fraction_per_k",
            kind: number("1/K", (-0.05, 0.05), (-0.01, 0.01)),
            default: "0",
            doc: "what one kelvin more does to the fraction of the heaviest group-V element",
        },
        Key {
            name: "model_nm",
            kind: number("nm", (0.0, 200.0), (0.1, 30.0)),
            default: "10: of a first design, without house offsets",
            doc: "of the calculated wavelength itself, kept apart from growth",
        },
    ],
};

static FLUXES: Table = Table {
    path: "growth.flux_percent",
    doc: "One-sigma error of each group-III flux.",
    keys: &[flux("Al"), flux("Ga"), flux("In")],
};

static FLUXES_PER_K: Table = Table {
    path: "growth.flux_percent_per_k",
    doc: "Change of the incorporation of each group-III element with growth temperature.",
    keys: &[flux_per_k("Al"), flux_per_k("Ga"), flux_per_k("In")],
};

const fn flux(name: &'static str) -> Key {
    Key {
        name,
        kind: number("%", (0.0, 30.0), (0.05, 5.0)),
        default: "0",
        doc: "one-sigma error of the flux of this element",
    }
}

const fn flux_per_k(name: &'static str) -> Key {
    Key {
        name,
        kind: number("%/K", (-10.0, 10.0), (-3.0, 3.0)),
        default: "0",
        doc: "change of its incorporation with one kelvin more",
    }
}

/// The table as it stands in the file.
pub(super) struct GrowthTable {
    rate_percent: Field<f64>,
    flux_percent: Field<Fluxes>,
    group_v_fraction: Field<f64>,
    temperature_k: Field<f64>,
    flux_percent_per_k: Field<Fluxes>,
    group_v_fraction_per_k: Field<f64>,
    model_nm: Field<f64>,
}

impl From<Values> for GrowthTable {
    fn from(mut values: Values) -> Self {
        Self {
            rate_percent: values.number("rate_percent"),
            flux_percent: map(values.table("flux_percent"), fluxes),
            group_v_fraction: values.number("group_v_fraction"),
            temperature_k: values.number("temperature_k"),
            flux_percent_per_k: map(values.table("flux_percent_per_k"), fluxes),
            group_v_fraction_per_k: values.number("group_v_fraction_per_k"),
            model_nm: values.number("model_nm"),
        }
    }
}

fn fluxes(mut values: Values) -> Fluxes {
    let mut of = |name| values.number(name).and_then(|given| given.value);
    Fluxes {
        al: of("Al").unwrap_or(0.0),
        ga: of("Ga").unwrap_or(0.0),
        indium: of("In").unwrap_or(0.0),
    }
}

/// The errors that the table states; `None` without a table or after a complaint.
pub(super) fn growth(field: &Field<GrowthTable>, findings: &mut Findings) -> Option<Growth> {
    let given = field.as_ref()?;
    let table = given.value.as_ref()?;
    let growth = Growth {
        rate_percent: value(&table.rate_percent).unwrap_or_default(),
        flux_percent: value(&table.flux_percent).unwrap_or_default(),
        group_v_fraction: value(&table.group_v_fraction).unwrap_or_default(),
        temperature_k: value(&table.temperature_k).unwrap_or_default(),
        flux_percent_per_k: value(&table.flux_percent_per_k).unwrap_or_default(),
        group_v_fraction_per_k: value(&table.group_v_fraction_per_k).unwrap_or_default(),
        model_nm: value(&table.model_nm),
    };
    let acts =
        growth.group_v_fraction_per_k != 0.0 || growth.flux_percent_per_k != Fluxes::default();
    if let Some(temperature) = &table.temperature_k
        && temperature.value.is_some_and(|kelvin| kelvin > 0.0)
        && !acts
    {
        findings.faults.push(
            Diagnostic::new(
                temperature.key.clone(),
                "an error of the growth temperature, and nothing that hangs on it",
            )
            .with_help(
                "say what one kelvin does: `group_v_fraction_per_k = -0.002`, or \
                 `flux_percent_per_k = { In = -0.3 }`, from the reactor's own calibration",
            ),
        );
        return None;
    }
    Some(growth)
}

/// The table as a file says it.
pub(super) fn write(growth: &Growth, text: &mut String) {
    text.push_str("\n[growth]\n");
    let fluxes = |fluxes: &Fluxes| {
        format!(
            "{{ Al = {}, Ga = {}, In = {} }}",
            exact(fluxes.al),
            exact(fluxes.ga),
            exact(fluxes.indium)
        )
    };
    let mut line = |key: &str, value: String| {
        let _ = writeln!(text, "{key} = {value}");
    };
    line("rate_percent", exact(growth.rate_percent));
    line("flux_percent", fluxes(&growth.flux_percent));
    line("group_v_fraction", exact(growth.group_v_fraction));
    line("temperature_k", exact(growth.temperature_k));
    line("flux_percent_per_k", fluxes(&growth.flux_percent_per_k));
    line(
        "group_v_fraction_per_k",
        exact(growth.group_v_fraction_per_k),
    );
    if let Some(model_nm) = growth.model_nm {
        line("model_nm", exact(model_nm));
    }
}
