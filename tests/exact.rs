//! Levels against solvers of another kind.
//!
//! In a layer of constant potential the solution is a sine or a hyperbolic sine, in a field a power
//! series (an Airy function by another name). Carried from the lower wall upwards, its zeros are
//! counted layer by layer: as many as there are levels below the energy (Sturm). Bisection on that
//! count gives every level to 1e-13 eV, without a grid, and can miss none. φ and (1/m) φ′ are
//! continuous.

#![expect(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    reason = "numbers of zeros, parts and intervals are small and not negative"
)]

use std::fmt::Write as _;
use stepwell::materials::{Composition, Offsets, Parameters};
use stepwell::numerics::chain::{Chain, Run};
use stepwell::profile::{Profile, REACH_NM};
use stepwell::structure::{self, Overrides, Stack};
use stepwell::subbands::{Band, CLUSTER_EV, Level, single};
use stepwell::units::HBAR2_OVER_2M0_EV_NM2;

/// Numbers from a fixed sequence (splitmix64): the same stacks in every run.
struct Random(u64);

impl Random {
    fn between(&mut self, low: f64, high: f64) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut word = self.0;
        word = (word ^ (word >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        word = (word ^ (word >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        word ^= word >> 31;
        low + (high - low) * (word >> 11) as f64 / (1u64 << 53) as f64
    }

    fn below(&mut self, count: usize) -> usize {
        (self.between(0.0, count as f64) as usize).min(count - 1)
    }
}

/// A piece of the region: constant mass, potential constant or straight. Energies upwards.
#[derive(Clone, Copy)]
struct Piece {
    nm: f64,
    edge_ev: f64,
    slope_ev_nm: f64,
    mass: f64,
    /// 1/E_g where the mass rises with energy.
    softening_per_ev: f64,
}

impl Piece {
    /// ħ²/2m at an energy, eV nm².
    fn stiffness(&self, energy_ev: f64) -> f64 {
        let factor = 1.0 + self.softening_per_ev * (energy_ev - self.edge_ev);
        HBAR2_OVER_2M0_EV_NM2 / (self.mass * factor.max(0.1))
    }

    /// Carries (φ, (ħ²/2m) φ′) to the upper end, up to a common positive factor, and counts the
    /// zeros of φ on the way.
    fn carry(&self, energy_ev: f64, state: (f64, f64)) -> ((f64, f64), usize) {
        if self.slope_ev_nm != 0.0 {
            return self.carry_in_field(energy_ev, state);
        }
        let p = self.stiffness(energy_ev);
        let square = (energy_ev - self.edge_ev) / p;
        if square > 0.0 {
            let k = square.sqrt();
            let start = state.0.atan2(state.1 / (p * k));
            let end = start + k * self.nm;
            let zeros =
                (end / std::f64::consts::PI).floor() - (start / std::f64::consts::PI).floor();
            let size = state.0.hypot(state.1 / (p * k));
            let carried = (size * end.sin(), size * p * k * end.cos());
            return (carried, zeros as usize);
        }
        let kappa = (-square).sqrt();
        let fall = (-2.0 * kappa * self.nm).exp();
        // cosh and sinh over ½ exp(κ d).
        let (even, odd) = (1.0 + fall, 1.0 - fall);
        let odd_over_kappa = if kappa * self.nm > 1e-8 {
            odd / kappa
        } else {
            2.0 * self.nm
        };
        let carried = (
            state.0 * even + state.1 / p * odd_over_kappa,
            state.0 * p * kappa * odd + state.1 * even,
        );
        let crossed = state.0 != 0.0 && (state.0 > 0.0) != (carried.0 > 0.0);
        (carried, usize::from(crossed))
    }

    /// φ″ = (u + w z) φ by its power series, in parts so short that each holds one zero at most.
    fn carry_in_field(&self, energy_ev: f64, state: (f64, f64)) -> ((f64, f64), usize) {
        let p = self.stiffness(energy_ev);
        let parts = (self.nm / 0.5).ceil().max(1.0);
        let step = self.nm / parts;
        let (mut value, mut slope, mut zeros) = (state.0, state.1 / p, 0);
        for part in 0..parts as usize {
            let at = self.edge_ev + self.slope_ev_nm * step * part as f64;
            let (u, w) = ((at - energy_ev) / p, self.slope_ev_nm / p);
            // Coefficients times step^n.
            let mut c = vec![value, slope * step];
            for n in 0..40 {
                let before = if n == 0 { 0.0 } else { c[n - 1] * w * step };
                let next = (c[n] * u + before) * step * step / ((n + 1) * (n + 2)) as f64;
                c.push(next);
            }
            let next: f64 = c.iter().sum();
            let rise: f64 = c.iter().enumerate().map(|(n, c)| n as f64 * c).sum();
            zeros += usize::from(value != 0.0 && (value > 0.0) != (next > 0.0));
            let size = next.hypot(rise);
            (value, slope) = (next / size, rise / (size * step));
        }
        ((value, slope * p), zeros)
    }
}

/// Levels below an energy.
fn count_below(pieces: &[Piece], energy_ev: f64) -> usize {
    let mut state = (0.0, 1.0);
    let mut count = 0;
    for piece in pieces {
        let (next, zeros) = piece.carry(energy_ev, state);
        let size = next.0.hypot(next.1);
        state = (next.0 / size, next.1 / size);
        count += zeros;
    }
    count
}

/// The level with `number` levels below it, between two energies.
fn level_ev(pieces: &[Piece], number: usize, low_ev: f64, high_ev: f64) -> f64 {
    let (mut low, mut high) = (low_ev, high_ev);
    while high - low > 1e-13 {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            break;
        }
        if count_below(pieces, middle) > number {
            high = middle;
        } else {
            low = middle;
        }
    }
    0.5 * (low + high)
}

/// One layer of a random stack: its numbers and whether it is a well.
#[derive(Clone, Copy)]
struct Layer {
    nm: f64,
    conduction_ev: f64,
    valence_ev: f64,
    electron_mass: f64,
    luttinger: [f64; 3],
    well: bool,
}

/// Up to four wells of random depth, width and masses; sometimes one well repeated, so that levels
/// come in clusters.
fn random_layers(random: &mut Random) -> Vec<Layer> {
    let wells = 1 + random.below(4);
    let alike = random.below(3) == 0;
    let layer = |random: &mut Random, well: bool| {
        let gamma2 = random.between(1.0, 3.0);
        Layer {
            nm: if well {
                random.between(1.0, 14.0)
            } else {
                random.between(0.6, 16.0)
            },
            conduction_ev: if well {
                random.between(0.8, 0.95)
            } else {
                random.between(1.0, 1.4)
            },
            valence_ev: if well {
                random.between(-0.1, 0.0)
            } else {
                random.between(-0.4, -0.14)
            },
            electron_mass: random.between(0.03, 0.13),
            luttinger: [
                2.0 * gamma2 + random.between(1.8, 4.0),
                gamma2,
                random.between(0.8, 1.0) * gamma2,
            ],
            well,
        }
    };
    let (first, between) = (layer(random, true), layer(random, false));
    let mut layers = vec![layer(random, false)];
    for number in 0..wells {
        if number > 0 {
            layers.push(if alike { between } else { layer(random, false) });
        }
        layers.push(if alike { first } else { layer(random, true) });
    }
    layers.push(layer(random, false));
    // Outer layers shorter or longer than the reach.
    let last = layers.len() - 1;
    for outer in [0, last] {
        layers[outer].nm = random.between(5.0, 120.0);
    }
    layers
}

/// The file of a stack of own numbers, each layer a material of its own.
fn file(layers: &[Layer], nonparabolic: bool, field_kv_cm: f64) -> String {
    let mut rows = String::new();
    let mut materials = String::new();
    for (index, layer) in layers.iter().enumerate() {
        let role = if layer.well { "well" } else { "barrier" };
        let [first, second, third] = layer.luttinger;
        let _ = writeln!(
            rows,
            "  {{ role = \"{role}\", material = \"m{index}\", thickness_nm = {:?} }},",
            layer.nm
        );
        let _ = writeln!(
            materials,
            "[materials.m{index}.numbers]\nlattice_nm = 0.6\ngap_ev = {:?}\nvalence_edge_ev = {:?}\n\
             split_off_ev = 0.3\nelectron_mass = {:?}\nluttinger = [{first:?}, {second:?}, {third:?}]\n\
             kane_energy_ev = 25\nac_ev = -7\nav_ev = 1\nb_ev = -2\nc11_gpa = 120\nc12_gpa = 55\nindex = 3.4",
            layer.conduction_ev - layer.valence_ev,
            layer.valence_ev,
            layer.electron_mass,
        );
    }
    format!(
        "format = 1\nlayers = [\n{rows}]\n[substrate]\nmaterial = \"m0\"\n{materials}\
         [model]\nbands = \"single\"\nnonparabolic = {nonparabolic}\nfield_kv_cm = {field_kv_cm:?}\n"
    )
}

fn stack(text: &str, parameters: &Parameters) -> Stack {
    match structure::read(text, parameters, &Overrides::default()) {
        Ok(reading) => reading.stack,
        Err(faults) => panic!("{}\n{text}", faults[0].message),
    }
}

/// The solved region of a stack as pieces of one band, energies counted upwards from the edge: the
/// outermost layers end 60 nm beyond the wells, or are prolonged to there.
fn pieces(layers: &[Layer], band: Band, nonparabolic: bool, slope_ev_nm: f64) -> Vec<Piece> {
    let last = layers.len() - 1;
    let wells_nm: f64 = layers[1..last].iter().map(|layer| layer.nm).sum();
    let mut z_nm = -REACH_NM - 0.5 * wells_nm;
    layers
        .iter()
        .enumerate()
        .map(|(index, layer)| {
            let nm = if index == 0 || index == last {
                REACH_NM
            } else {
                layer.nm
            };
            let [first, second, _] = layer.luttinger;
            let (edge, mass, sign) = match band {
                Band::Electron => (layer.conduction_ev, layer.electron_mass, 1.0),
                Band::Heavy => (layer.valence_ev, (first - 2.0 * second).recip(), -1.0),
                Band::Light => (layer.valence_ev, (first + 2.0 * second).recip(), -1.0),
            };
            let piece = Piece {
                nm,
                edge_ev: sign * (edge + slope_ev_nm * z_nm),
                slope_ev_nm: sign * slope_ev_nm,
                mass,
                softening_per_ev: if band == Band::Electron && nonparabolic {
                    (layer.conduction_ev - layer.valence_ev).recip()
                } else {
                    0.0
                },
            };
            z_nm += nm;
            piece
        })
        .collect()
}

const BANDS: [Band; 3] = [Band::Electron, Band::Heavy, Band::Light];

fn upward_ev(band: Band, level: &Level) -> f64 {
    if band == Band::Electron {
        level.energy_ev
    } else {
        -level.energy_ev
    }
}

/// The error that a level which is alone may have by its own estimate. The estimate is the size of
/// the last correction of an extrapolation, which can vanish by accident: hence the factor, and a
/// fiftieth of the 0.01 meV that is promised.
fn allowed_ev(level: &Level) -> f64 {
    4.0 * level.error_ev + 2e-7
}

/// Runs of neighbours so close that only sums over them mean anything, with the margin that the
/// grids have in deciding it.
fn clusters(levels: &[f64]) -> Vec<std::ops::Range<usize>> {
    let mut clusters = Vec::new();
    let mut first = 0;
    for index in 1..=levels.len() {
        if index == levels.len() || levels[index] - levels[index - 1] > 1.5 * CLUSTER_EV {
            clusters.push(first..index);
            first = index;
        }
    }
    clusters
}

/// A level so close to the edge that rounding decides whether it is bound proves nothing.
const UNDECIDED_EV: f64 = 1e-6;

#[test]
fn every_bound_level_of_a_thousand_stacks_is_found_within_its_own_error() {
    let parameters = Parameters::shipped();
    let mut random = Random(1);
    let (mut compared, mut alone, mut undecided) = (0, 0, 0);
    for number in 0..1000 {
        let layers = random_layers(&mut random);
        let nonparabolic = number % 2 == 0;
        let text = file(&layers, nonparabolic, 0.0);
        let stack = stack(&text, &parameters);
        let profile = Profile::new(&stack, &parameters).expect("wells between barriers");
        let bands = single(&profile, nonparabolic).expect("certified levels");
        for band in BANDS {
            let pieces = pieces(&layers, band, nonparabolic, 0.0);
            let limit = pieces[0].edge_ev.min(pieces[pieces.len() - 1].edge_ev);
            let floor = pieces
                .iter()
                .map(|piece| piece.edge_ev)
                .fold(f64::INFINITY, f64::min);
            let counts = [-1.0, 1.0].map(|sign| count_below(&pieces, limit + sign * UNDECIDED_EV));
            if counts[0] != counts[1] {
                undecided += 1;
                continue;
            }
            let found = bands.of(band);
            assert_eq!(
                found.len(),
                counts[0],
                "stack {number}, {} levels\n{text}",
                band.word()
            );
            let exact: Vec<f64> = (0..found.len())
                .map(|index| level_ev(&pieces, index, floor, limit))
                .collect();
            for cluster in clusters(&exact) {
                let misses = cluster
                    .clone()
                    .map(|index| upward_ev(band, &found[index]) - exact[index]);
                let allowed = cluster
                    .clone()
                    .map(|index| allowed_ev(&found[index]))
                    .fold(0.0, f64::max);
                let mean = misses.clone().sum::<f64>() / cluster.len() as f64;
                // Members may be off by as much as they are apart: grids mix them their own way.
                let width = exact[cluster.end - 1] - exact[cluster.start];
                let worst = misses.map(f64::abs).fold(0.0, f64::max);
                assert!(
                    mean.abs() <= allowed && worst <= allowed + width,
                    "stack {number}, {} levels {cluster:?}: mean off by {mean:e} eV, the worst by \
                     {worst:e}, allowed {allowed:e}, width {width:e}\n{text}",
                    band.word()
                );
                alone += usize::from(cluster.len() == 1);
                compared += cluster.len();
            }
            assert!(
                found.iter().all(|level| level.error_ev < 1e-5),
                "0.01 meV is promised"
            );
        }
    }
    assert!(
        compared > 10_000 && alone > 5_000,
        "only {compared} levels, {alone} of them alone"
    );
    assert!(undecided < 10, "{undecided} ladders undecided");
}

/// In a field the box decides how many states there are; those that the program lists must each be
/// one of the exact ones, found once.
#[test]
fn levels_in_a_field_are_those_of_the_airy_functions() {
    let parameters = Parameters::shipped();
    let mut random = Random(2);
    let mut compared = 0;
    for number in 0..40 {
        let layers = random_layers(&mut random);
        let field_kv_cm = random.between(-60.0, 60.0);
        let text = file(&layers, false, field_kv_cm);
        let stack = stack(&text, &parameters);
        let profile = Profile::new(&stack, &parameters).expect("wells between barriers");
        let bands = single(&profile, false).expect("certified levels");
        for band in BANDS {
            let pieces = pieces(&layers, band, false, 1e-4 * field_kv_cm);
            let mut below = 0;
            let energies: Vec<f64> = bands
                .of(band)
                .iter()
                .map(|level| upward_ev(band, level))
                .collect();
            for (index, level) in bands.of(band).iter().enumerate() {
                let energy = energies[index];
                let width = clusters(&energies)
                    .into_iter()
                    .find(|cluster| cluster.contains(&index))
                    .map_or(0.0, |cluster| {
                        energies[cluster.end - 1] - energies[cluster.start]
                    });
                let allowed = allowed_ev(level) + width;
                let around =
                    [energy - allowed, energy + allowed].map(|energy| count_below(&pieces, energy));
                // Levels closer than the error share an interval.
                assert!(
                    around[1] > around[0] && around[1] > below,
                    "stack {number} in {field_kv_cm} kV/cm: no {} level within {allowed:e} of {energy}\n{text}",
                    band.word()
                );
                below = below.max(around[0]) + 1;
                compared += 1;
            }
        }
    }
    assert!(compared > 300, "only {compared} levels");
}

/// A graded layer cut into slices, each of its own middle, on two slicings extrapolated.
#[expect(
    clippy::too_many_lines,
    reason = "one structure told twice, as a file and as slices"
)]
#[test]
fn levels_beside_a_grade_are_those_of_many_thin_slices() {
    const TEXT: &str = "
        format = 1
        layers = [
          { role = 'confinement', material = 'Al0.5Ga0.5As', grade_to = 'Al0.2Ga0.8As', thickness_nm = 40 },
          { role = 'well', material = 'GaAs', thickness_nm = 7 },
          { role = 'confinement', material = 'Al0.2Ga0.8As', grade_to = 'Al0.5Ga0.5As', thickness_nm = 90 },
        ]
        [substrate]
        material = 'GaAs'
        [model]
        bands = 'single'
    ";
    let parameters = Parameters::shipped();
    let composition = |text: &str| Composition::parse(text).expect("a formula");
    let (rich, poor) = (composition("Al0.5Ga0.5As"), composition("Al0.2Ga0.8As"));
    let substrate_nm = parameters
        .crystal(&composition("GaAs"), 300.0, Offsets::Table)
        .lattice_nm;
    let slices = |band: Band, parts_per_nm: usize| -> Vec<Piece> {
        // (from, to, thickness in nm, from which to which share of the way)
        let ends = [
            (rich, rich, 20.0, (0.0, 0.0)),
            (rich, poor, 40.0, (0.0, 1.0)),
            (composition("GaAs"), composition("GaAs"), 7.0, (0.0, 0.0)),
            (poor, rich, 60.0, (0.0, 60.0 / 90.0)),
        ];
        ends.iter()
            .flat_map(|&(from, to, nm, (start, end))| {
                let parts = if end - start < 1e-9 {
                    1
                } else {
                    nm as usize * parts_per_nm
                };
                let parameters = &parameters;
                (0..parts).map(move |part| {
                    let share = start + (end - start) * (part as f64 + 0.5) / parts as f64;
                    let crystal = parameters.crystal(
                        &from.towards(&to, share),
                        300.0,
                        Offsets::TableUnbowedInGaAs,
                    );
                    let edges = crystal.on(substrate_nm);
                    let (edge_ev, mass, softening_per_ev) = match band {
                        Band::Electron => (
                            edges.conduction_ev,
                            crystal.electron_mass,
                            edges.gap_ev().recip(),
                        ),
                        Band::Heavy => (-edges.heavy_ev, crystal.heavy_mass_growth(), 0.0),
                        Band::Light => (-edges.light_ev, crystal.light_mass_growth(), 0.0),
                    };
                    Piece {
                        nm: nm / parts as f64,
                        edge_ev,
                        slope_ev_nm: 0.0,
                        mass,
                        softening_per_ev,
                    }
                })
            })
            .collect()
    };
    let poor_edge_ev = |band: Band| {
        let edges = parameters
            .crystal(&poor, 300.0, Offsets::TableUnbowedInGaAs)
            .on(substrate_nm);
        match band {
            Band::Electron => edges.conduction_ev,
            Band::Heavy => -edges.heavy_ev,
            Band::Light => -edges.light_ev,
        }
    };
    let stack = stack(TEXT, &parameters);
    let profile = Profile::new(&stack, &parameters).expect("a well");
    let bands = single(&profile, true).expect("certified levels");
    for band in BANDS {
        let (coarse, fine) = (slices(band, 20), slices(band, 40));
        let (low, high) = (
            coarse[coarse.len() / 2].edge_ev - 1.0,
            coarse[0].edge_ev + 0.1,
        );
        let found = bands.of(band);
        assert!(!found.is_empty(), "{} levels", band.word());
        assert_eq!(
            found.len(),
            count_below(&fine, poor_edge_ev(band)),
            "{} levels below the lower end of the grade",
            band.word()
        );
        for (index, level) in found.iter().enumerate() {
            let values = [&coarse, &fine].map(|slices| level_ev(slices, index, low, high));
            let exact = values[1] + (values[1] - values[0]) / 3.0;
            let miss = (upward_ev(band, level) - exact).abs();
            assert!(
                miss <= allowed_ev(level) + 1e-9,
                "{} level {}: off by {miss:e}, estimate {:e}",
                band.word(),
                index + 1,
                level.error_ev
            );
        }
    }
}

/// Raw levels converge with the square of the step, once extrapolated with its fourth power.
#[test]
fn the_order_is_two_and_four_once_extrapolated() {
    let mut random = Random(3);
    let mut orders = (Vec::new(), Vec::new());
    for number in 0..40 {
        let layers = random_layers(&mut random);
        let pieces = pieces(&layers, Band::Electron, number % 2 == 0, 0.0);
        let exact = level_ev(&pieces, 0, 0.0, 2.0);
        let raw = [1.0, 0.5, 0.25, 0.125].map(|step| {
            let runs = pieces.iter().map(|piece| {
                // Twice as many intervals at each half of the step.
                let intervals = (piece.nm.ceil() / step) as usize;
                Run {
                    intervals,
                    length: piece.nm / intervals as f64,
                    stiffness: HBAR2_OVER_2M0_EV_NM2 / piece.mass,
                    potential: piece.edge_ev,
                    softening: piece.softening_per_ev,
                }
            });
            let chain = Chain::new(runs.collect());
            chain.lowest(1, None).expect("certified")[0].energy
        });
        let order = |coarse: f64, fine: f64| ((coarse - exact) / (fine - exact)).abs().log2();
        orders.0.push(order(raw[2], raw[3]));
        let extrapolated: Vec<f64> = raw
            .windows(2)
            .map(|pair| pair[1] + (pair[1] - pair[0]) / 3.0)
            .collect();
        orders.1.push(order(extrapolated[1], extrapolated[2]));
    }
    let median = |values: &mut Vec<f64>| {
        values.sort_by(f64::total_cmp);
        values[values.len() / 2]
    };
    let (second, fourth) = (median(&mut orders.0), median(&mut orders.1));
    assert!((second - 2.0).abs() < 0.02, "raw order {second}");
    assert!((fourth - 4.0).abs() < 0.1, "extrapolated order {fourth}");
}

/// The exact solver itself against a closed form: sin(kL) = 0 between walls, and zero levels below
/// the floor.
#[test]
fn the_counting_solver_knows_the_infinite_well() {
    for slope in [0.0, 1e-12] {
        let wall = Piece {
            nm: 10.0,
            edge_ev: 0.0,
            slope_ev_nm: slope,
            mass: 0.067,
            softening_per_ev: 0.0,
        };
        for number in 0..6u8 {
            let k = std::f64::consts::PI * f64::from(number + 1) / 10.0;
            let exact = HBAR2_OVER_2M0_EV_NM2 * k * k / 0.067;
            let got = level_ev(&[wall], usize::from(number), 0.0, 10.0);
            assert!((got - exact).abs() < 1e-11, "{number}: {got} {exact}");
        }
        assert_eq!(count_below(&[wall], -0.1), 0);
    }
}
