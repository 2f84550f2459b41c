//! Time of the kernels and of the whole chain.

#[expect(dead_code, reason = "each bench uses a part of the problems")]
mod problems;

use criterion::{Criterion, criterion_group, criterion_main};
use nalgebra::{DMatrix, SymmetricEigen};
use problems::single_band::SingleBand;
use problems::{spectrum, valence};
use std::hint::black_box;
use stepwell::evaluation::Evaluation;
use stepwell::materials::Parameters;
use stepwell::structure::{self, Bands, Lineshape, Overrides};

/// Three wells in 60 nm: all levels with vectors, certified; beside them a general-purpose library
/// on the same matrix.
fn single_band(bench: &mut Criterion) {
    let mut group = bench.benchmark_group("single_band");
    for nodes in [599, 2399] {
        for (masses, softened) in [("constant", false), ("energy-dependent", true)] {
            let mut problem = SingleBand::new(nodes, softened);
            group.bench_function(format!("{nodes}_{masses}"), |b| {
                b.iter(|| black_box(problem.solve()));
            });
        }
    }
    let (diagonal, second) = SingleBand::new(599, false).fine.matrix(0.0);
    let dense = DMatrix::from_fn(diagonal.len(), diagonal.len(), |row, column| {
        match row.abs_diff(column) {
            0 => diagonal[row],
            1 => second[row.min(column)],
            _ => 0.0,
        }
    });
    group.sample_size(10);
    group.bench_function("599_nalgebra", |b| {
        b.iter(|| black_box(SymmetricEigen::new(dense.clone())));
    });
    group.finish();
}

/// Eight valence states of 279 nodes at 80 wave numbers.
fn valence_block(bench: &mut Criterion) {
    let mut problem = valence::Valence::new();
    bench.bench_function("valence/80_wave_numbers", |b| {
        b.iter(|| black_box(problem.solve()));
    });
}

/// 400 photon energies, 3200 samples.
fn spectrum_sum(bench: &mut Criterion) {
    let mut group = bench.benchmark_group("spectrum_sum");
    for (name, shape) in [
        ("sech", Lineshape::Sech),
        ("lorentzian", Lineshape::Lorentzian),
    ] {
        let emitter = spectrum::emitter(shape);
        group.bench_function(name, |b| b.iter(|| black_box(spectrum::solve(&emitter))));
    }
    group.finish();
}

/// From the text of a structure file to spectra at five densities.
fn whole_chain(bench: &mut Criterion) {
    let text = include_str!("../structures/estuary-980.toml");
    let parameters = Parameters::shipped();
    let mut group = bench.benchmark_group("whole_chain");
    for bands in [Bands::Single, Bands::Mixed] {
        group.sample_size(if bands == Bands::Single { 50 } else { 10 });
        group.bench_function(bands.word(), |b| {
            b.iter(|| {
                let overrides = Overrides {
                    bands: Some(bands),
                    densities_cm3: vec![1e18, 2e18, 3e18, 4e18, 5e18],
                    ..Overrides::default()
                };
                let reading = structure::read(text, &parameters, &overrides).expect("sound");
                let evaluation = Evaluation::new(&reading.stack, &parameters).expect("levels");
                black_box(evaluation.spectrum().expect("spectra"))
            });
        });
    }
    group.finish();
}

criterion_group!(
    kernels,
    single_band,
    valence_block,
    spectrum_sum,
    whole_chain
);
criterion_main!(kernels);
