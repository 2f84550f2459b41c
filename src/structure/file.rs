//! The structure file, key by key: what it says, nothing believed but the kind and size of each
//! single value.

use std::ops::Range;

use super::growth::GrowthTable;
use super::reader::{Field, Given, Values};

pub(super) struct StructureFile {
    pub(super) format: Field<u64>,
    pub(super) title: Field<String>,
    pub(super) substrate: Field<SubstrateTable>,
    /// By the order of the file.
    pub(super) materials: Vec<(String, Given<MaterialTable>)>,
    pub(super) layers: Field<Vec<Row>>,
    pub(super) operation: OperationTable,
    pub(super) model: ModelTable,
    pub(super) target: Option<TargetTable>,
    pub(super) growth: Field<GrowthTable>,
    pub(super) limits: Option<LimitsTable>,
    /// Its keys are gone through by [`order`](super::order::order).
    pub(super) order: Field<Values>,
}

pub(super) struct SubstrateTable {
    pub(super) span: Range<usize>,
    pub(super) material: Field<String>,
}

pub(super) struct MaterialTable {
    pub(super) span: Range<usize>,
    pub(super) formula: Field<String>,
    pub(super) alloy: Field<String>,
    pub(super) gap_nm: Field<f64>,
    pub(super) compressive_percent: Field<f64>,
    pub(super) tensile_percent: Field<f64>,
    pub(super) matched: Field<bool>,
    pub(super) numbers: Field<NumbersTable>,
}

pub(super) struct NumbersTable {
    pub(super) span: Range<usize>,
    pub(super) lattice_nm: Field<f64>,
    pub(super) gap_ev: Field<f64>,
    pub(super) valence_edge_ev: Field<f64>,
    pub(super) split_off_ev: Field<f64>,
    pub(super) electron_mass: Field<f64>,
    pub(super) luttinger: Field<Vec<(Range<usize>, f64)>>,
    pub(super) kane_energy_ev: Field<f64>,
    pub(super) ac_ev: Field<f64>,
    pub(super) av_ev: Field<f64>,
    pub(super) b_ev: Field<f64>,
    pub(super) c11_gpa: Field<f64>,
    pub(super) c12_gpa: Field<f64>,
    pub(super) index: Field<f64>,
}

/// A layer or a group: which of the two is not yet settled.
pub(super) struct Row {
    pub(super) span: Range<usize>,
    pub(super) role: Field<String>,
    pub(super) material: Field<String>,
    pub(super) grade_to: Field<String>,
    pub(super) thickness_nm: Field<f64>,
    pub(super) donors_cm3: Field<f64>,
    pub(super) acceptors_cm3: Field<f64>,
    pub(super) dopant: Field<String>,
    pub(super) repeat: Field<u64>,
    pub(super) layers: Field<Vec<Row>>,
}

#[derive(Default)]
pub(super) struct OperationTable {
    pub(super) temperature_c: Field<f64>,
    pub(super) temperature_k: Field<f64>,
    pub(super) densities_cm3: Field<Vec<(Range<usize>, f64)>>,
    pub(super) working_density_cm3: Field<f64>,
}

#[derive(Default)]
pub(super) struct ModelTable {
    pub(super) bands: Field<String>,
    pub(super) nonparabolic: Field<bool>,
    pub(super) lineshape: Field<String>,
    pub(super) intraband_fs: Field<f64>,
    pub(super) shrinkage_mev: Field<f64>,
    pub(super) conduction_share: Field<f64>,
    pub(super) field_kv_cm: Field<f64>,
    pub(super) index: Field<f64>,
}

pub(super) struct TargetTable {
    pub(super) span: Range<usize>,
    pub(super) kind: Field<String>,
    pub(super) wavelength_nm: Field<f64>,
    pub(super) medium: Field<String>,
    pub(super) temperature_c: Field<f64>,
    pub(super) density_cm3: Field<f64>,
    pub(super) tolerance_nm: Field<f64>,
}

pub(super) struct LimitsTable {
    pub(super) strain_percent_max: Field<f64>,
    pub(super) strain_thickness_percent_nm_max: Field<f64>,
    pub(super) net_strain_percent_max: Field<f64>,
    pub(super) critical_share_max: Field<f64>,
    pub(super) mismatch_ppm_max: Field<f64>,
    pub(super) layer_nm_min: Field<f64>,
    pub(super) well_nm_min: Field<f64>,
    pub(super) barrier_kt_min: Field<f64>,
    pub(super) coupling_mev_max: Field<f64>,
    pub(super) acceptor_setback_nm_min: Field<f64>,
    pub(super) without_elements: Field<String>,
}

/// The same place with what `convert` makes of the value.
pub(super) fn map<T, U>(field: Field<T>, convert: impl FnOnce(T) -> U) -> Field<U> {
    field.map(|given| Given {
        key: given.key,
        span: given.span,
        value: given.value.map(convert),
    })
}

impl From<Values> for StructureFile {
    fn from(mut values: Values) -> Self {
        let materials = values.named("materials").and_then(|given| given.value);
        Self {
            format: values.count("format"),
            title: values.text("title"),
            substrate: map(values.table("substrate"), |mut table| SubstrateTable {
                material: table.text("material"),
                span: table.span,
            }),
            materials: materials
                .unwrap_or_default()
                .into_iter()
                .map(|(name, given)| {
                    let table = Given {
                        key: given.key,
                        span: given.span,
                        value: given.value.map(MaterialTable::from),
                    };
                    (name, table)
                })
                .collect(),
            layers: map(values.rows("layers"), rows),
            operation: values
                .table("operation")
                .and_then(|given| given.value)
                .map(OperationTable::from)
                .unwrap_or_default(),
            model: values
                .table("model")
                .and_then(|given| given.value)
                .map(ModelTable::from)
                .unwrap_or_default(),
            target: values
                .table("target")
                .and_then(|given| given.value)
                .map(TargetTable::from),
            growth: map(values.table("growth"), GrowthTable::from),
            limits: values
                .table("limits")
                .and_then(|given| given.value)
                .map(LimitsTable::from),
            order: values.table("order"),
        }
    }
}

impl From<Values> for MaterialTable {
    fn from(mut values: Values) -> Self {
        Self {
            formula: values.text("formula"),
            alloy: values.text("alloy"),
            gap_nm: values.number("gap_nm"),
            compressive_percent: values.number("compressive_percent"),
            tensile_percent: values.number("tensile_percent"),
            matched: values.flag("matched"),
            numbers: map(values.table("numbers"), NumbersTable::from),
            span: values.span,
        }
    }
}

impl From<Values> for NumbersTable {
    fn from(mut values: Values) -> Self {
        Self {
            lattice_nm: values.number("lattice_nm"),
            gap_ev: values.number("gap_ev"),
            valence_edge_ev: values.number("valence_edge_ev"),
            split_off_ev: values.number("split_off_ev"),
            electron_mass: values.number("electron_mass"),
            luttinger: values.numbers("luttinger"),
            kane_energy_ev: values.number("kane_energy_ev"),
            ac_ev: values.number("ac_ev"),
            av_ev: values.number("av_ev"),
            b_ev: values.number("b_ev"),
            c11_gpa: values.number("c11_gpa"),
            c12_gpa: values.number("c12_gpa"),
            index: values.number("index"),
            span: values.span,
        }
    }
}

fn rows(tables: Vec<Values>) -> Vec<Row> {
    tables.into_iter().map(Row::from).collect()
}

impl From<Values> for Row {
    fn from(mut values: Values) -> Self {
        Self {
            role: values.text("role"),
            material: values.text("material"),
            grade_to: values.text("grade_to"),
            thickness_nm: values.number("thickness_nm"),
            donors_cm3: values.number("donors_cm3"),
            acceptors_cm3: values.number("acceptors_cm3"),
            dopant: values.text("dopant"),
            repeat: values.count("repeat"),
            layers: map(values.rows("layers"), rows),
            span: values.span,
        }
    }
}

impl From<Values> for OperationTable {
    fn from(mut values: Values) -> Self {
        Self {
            temperature_c: values.number("temperature_c"),
            temperature_k: values.number("temperature_k"),
            densities_cm3: values.numbers("densities_cm3"),
            working_density_cm3: values.number("working_density_cm3"),
        }
    }
}

impl From<Values> for ModelTable {
    fn from(mut values: Values) -> Self {
        Self {
            bands: values.text("bands"),
            nonparabolic: values.flag("nonparabolic"),
            lineshape: values.text("lineshape"),
            intraband_fs: values.number("intraband_fs"),
            shrinkage_mev: values.number("shrinkage_mev"),
            conduction_share: values.number("conduction_share"),
            field_kv_cm: values.number("field_kv_cm"),
            index: values.number("index"),
        }
    }
}

impl From<Values> for TargetTable {
    fn from(mut values: Values) -> Self {
        Self {
            kind: values.text("kind"),
            wavelength_nm: values.number("wavelength_nm"),
            medium: values.text("medium"),
            temperature_c: values.number("temperature_c"),
            density_cm3: values.number("density_cm3"),
            tolerance_nm: values.number("tolerance_nm"),
            span: values.span,
        }
    }
}

impl From<Values> for LimitsTable {
    fn from(mut values: Values) -> Self {
        Self {
            strain_percent_max: values.number("strain_percent_max"),
            strain_thickness_percent_nm_max: values.number("strain_thickness_percent_nm_max"),
            net_strain_percent_max: values.number("net_strain_percent_max"),
            critical_share_max: values.number("critical_share_max"),
            mismatch_ppm_max: values.number("mismatch_ppm_max"),
            layer_nm_min: values.number("layer_nm_min"),
            well_nm_min: values.number("well_nm_min"),
            barrier_kt_min: values.number("barrier_kt_min"),
            coupling_mev_max: values.number("coupling_mev_max"),
            acceptor_setback_nm_min: values.number("acceptor_setback_nm_min"),
            without_elements: values.text("without_elements"),
        }
    }
}
