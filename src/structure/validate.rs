//! From the file to a [`Stack`], collecting every complaint on the way.

use super::file::{ModelTable, OperationTable, StructureFile, TargetTable};
use super::growth::growth;
use super::layers::Layers;
use super::magnitude::check_magnitude;
use super::number::shown;
use super::order::order;
use super::palette::Palette;
use super::reader::{Findings, value};
use super::{
    Bands, Limits, Lineshape, Medium, Model, Operation, Overrides, Remark, Stack, Target,
    Wavelength,
};
use crate::materials::Parameters;
use crate::source::Diagnostic;
use crate::units::CELSIUS_ZERO_K;

/// Temperature where none is given, K.
const DEFAULT_TEMPERATURE_K: f64 = 300.0;
/// Densities where none are given, cm⁻³.
const DEFAULT_DENSITIES_CM3: [f64; 5] = [1e18, 2e18, 3e18, 4e18, 5e18];
/// The stack that the file describes; `None` after a complaint.
pub(super) fn stack(
    file: &StructureFile,
    text: &str,
    parameters: &Parameters,
    overrides: &Overrides,
    findings: &mut Findings,
) -> Option<Stack> {
    if file.format.is_none() {
        findings.faults.push(
            Diagnostic::new(0..0, "the file does not say its `format`")
                .with_help("write `format = 1` as the first line"),
        );
    }
    let operation = operation(&file.operation, overrides, findings);
    let model = model(&file.model, overrides);
    let target = file
        .target
        .as_ref()
        .and_then(|table| target(table, findings));
    let limits = file
        .limits
        .as_ref()
        .map(|table| Limits::of(table, findings));
    let (palette, substrate) = Palette::of(file, text, parameters, findings);
    let mut reading = Layers::new(palette, parameters, operation.temperature_k);
    let layers = reading.expanded(file.layers.as_ref(), findings);
    let growth = growth(&file.growth, findings);
    let order = order(file.order.clone(), findings);
    let own_numbers = reading.palette().remarks(findings);
    if overrides.temperature_k.is_some() && !own_numbers.is_empty() {
        findings
            .remarks
            .push(Remark::OwnNumbersKept { names: own_numbers });
    }
    if !operation.temperature_given {
        findings.remarks.push(Remark::DefaultTemperature {
            temperature_k: operation.temperature_k,
        });
    }
    Some(Stack {
        title: match &file.title {
            Some(given) => given.value.clone()?,
            None => "untitled".to_owned(),
        },
        substrate: substrate?,
        layers: layers?,
        operation,
        model,
        target,
        growth,
        limits,
        order,
    })
}

fn target(table: &TargetTable, findings: &mut Findings) -> Option<Target> {
    let Some(given) = &table.wavelength_nm else {
        findings.faults.push(
            Diagnostic::new(table.span.clone(), "the target has no `wavelength_nm`")
                .with_help("say which wavelength it is: `wavelength_nm = 1310`"),
        );
        return None;
    };
    let kind = value(&table.kind).and_then(|word| {
        let mut kinds = Wavelength::ALL.into_iter();
        kinds.find(|kind| kind.word() == word)
    });
    let medium = value(&table.medium).and_then(|word| {
        let mut media = Medium::ALL.into_iter();
        media.find(|medium| medium.word() == word)
    });
    let taken_kind = Wavelength::Photoluminescence;
    let taken_medium = Medium::default();
    let taken: Vec<_> = [
        (table.kind.is_none(), "kind", taken_kind.word()),
        (table.medium.is_none(), "medium", taken_medium.word()),
    ]
    .into_iter()
    .filter_map(|(is_missing, key, value)| is_missing.then_some((key, value)))
    .collect();
    if !taken.is_empty() {
        findings.remarks.push(Remark::TargetAssumed {
            span: table.span.clone(),
            taken,
        });
    }
    Some(Target {
        kind: kind.unwrap_or(taken_kind),
        wavelength_nm: given.value?,
        medium: medium.unwrap_or(taken_medium),
        temperature_k: value(&table.temperature_c).map(|it| it + CELSIUS_ZERO_K),
        density_cm3: value(&table.density_cm3),
        tolerance_nm: value(&table.tolerance_nm),
    })
}

fn operation(table: &OperationTable, overrides: &Overrides, findings: &mut Findings) -> Operation {
    for (key, value) in overrides.numbers() {
        if let Err(refusal) = check_magnitude(key, value) {
            findings.faults.push(
                Diagnostic::new(0..0, format!("laid over the file: {}", refusal.message))
                    .with_help(refusal.help),
            );
        }
    }
    if let (Some(celsius), Some(kelvin)) = (&table.temperature_c, &table.temperature_k) {
        let key = if celsius.key.start > kelvin.key.start {
            &celsius.key
        } else {
            &kelvin.key
        };
        findings.faults.push(
            Diagnostic::new(
                key.clone(),
                "the temperature is given twice: `temperature_c` and `temperature_k`",
            )
            .with_help("keep one of them"),
        );
    }
    let from_file = value(&table.temperature_k)
        .or_else(|| value(&table.temperature_c).map(|celsius| celsius + CELSIUS_ZERO_K));
    let laid_over = overrides
        .temperature_k
        .filter(|kelvin| check_magnitude("temperature_k", *kelvin).is_ok());
    let temperature_k = laid_over.or(from_file);
    let listed = densities(table, findings);
    let (densities_cm3, working_density_cm3) = if overrides.densities_cm3.is_empty() {
        let highest = listed.last().copied().unwrap_or(DEFAULT_DENSITIES_CM3[4]);
        let working = value(&table.working_density_cm3).unwrap_or(highest);
        (listed, working)
    } else {
        let mut densities = overrides.densities_cm3.clone();
        densities.sort_by(f64::total_cmp);
        densities.dedup();
        let highest = densities[densities.len() - 1];
        (densities, highest)
    };
    Operation {
        temperature_k: temperature_k.unwrap_or(DEFAULT_TEMPERATURE_K),
        temperature_given: temperature_k.is_some(),
        densities_cm3,
        working_density_cm3,
    }
}

fn densities(table: &OperationTable, findings: &mut Findings) -> Vec<f64> {
    let Some(given) = &table.densities_cm3 else {
        return DEFAULT_DENSITIES_CM3.to_vec();
    };
    let mut listed = given.value.clone().unwrap_or_default();
    listed.sort_by(|(_, a), (_, b)| a.total_cmp(b));
    for pair in listed.windows(2) {
        if pair[0].1.total_cmp(&pair[1].1).is_eq() {
            findings.faults.push(
                Diagnostic::new(
                    pair[1].0.clone(),
                    format!("the density {} stands twice", shown(pair[1].1)),
                )
                .with_help("leave one of them out"),
            );
        }
    }
    listed.into_iter().map(|(_, density)| density).collect()
}

fn model(table: &ModelTable, overrides: &Overrides) -> Model {
    let defaults = Model::default();
    let bands = value(&table.bands).and_then(|word| {
        [Bands::Single, Bands::Mixed]
            .into_iter()
            .find(|bands| bands.word() == word)
    });
    let lineshape = value(&table.lineshape).and_then(|word| {
        Lineshape::ALL
            .into_iter()
            .find(|lineshape| lineshape.word() == word)
    });
    let nonparabolic = value(&table.nonparabolic);
    Model {
        bands: overrides.bands.or(bands).unwrap_or(defaults.bands),
        nonparabolic: nonparabolic.unwrap_or(defaults.nonparabolic),
        lineshape: lineshape.unwrap_or(defaults.lineshape),
        intraband_fs: value(&table.intraband_fs).unwrap_or(defaults.intraband_fs),
        shrinkage_mev: value(&table.shrinkage_mev).unwrap_or(defaults.shrinkage_mev),
        conduction_share: value(&table.conduction_share),
        field_kv_cm: value(&table.field_kv_cm).unwrap_or(defaults.field_kv_cm),
        index: value(&table.index),
    }
}
