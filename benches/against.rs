//! The program's side of `against.py`: one problem a line on standard input, one line of JSON each
//! on standard output, so that both sides are timed by turns in one run.
//!
//! ```text
//!  matrix single NODES | matrix valence | matrix spectrum       the problem, for the other side
//!  solve KIND [NODES|SHAPE] REPEATS                             seconds of one solution, the result
//! ```

mod problems;

use problems::single_band::{DEPTH_EV, SingleBand};
use problems::{spectrum, valence};
use serde_json::{Value, json};
use std::hint::black_box;
use std::io::{BufRead as _, Write as _};
use std::time::Instant;
use stepwell::structure::Lineshape;

/// Problems that are set up once.
struct Bench {
    single: Vec<(usize, bool, SingleBand)>,
    valence: valence::Valence,
}

fn main() -> std::io::Result<()> {
    if !std::env::args().any(|word| word == "serve") {
        // Run among the other benches there is nobody to answer.
        return Ok(());
    }
    let mut bench = Bench {
        single: Vec::new(),
        valence: valence::Valence::new(),
    };
    let mut output = std::io::stdout().lock();
    for line in std::io::stdin().lock().lines() {
        let line = line?;
        let words: Vec<&str> = line.split_whitespace().collect();
        writeln!(output, "{}", bench.answer(&words))?;
        output.flush()?;
    }
    Ok(())
}

impl Bench {
    fn answer(&mut self, words: &[&str]) -> Value {
        match words {
            ["matrix", "single", nodes] => {
                let fine = &self.single(nodes, false).fine;
                let (diagonal, second) = fine.matrix(0.0);
                json!({ "diagonal": diagonal, "second": second, "below": DEPTH_EV })
            }
            ["matrix", "valence"] => {
                let size = self.valence.size();
                let matrices: Vec<_> = (0..valence::WAVE_NUMBERS)
                    .map(|step| self.valence.entries(step))
                    .collect();
                let floor = self.valence.floor_ev();
                json!({ "size": size, "states": valence::STATES, "floor": floor, "matrices": matrices })
            }
            ["matrix", "spectrum"] => {
                let samples: Vec<[f64; 4]> = spectrum::samples()
                    .iter()
                    .map(|it| [it.electron_ev, it.hole_ev, it.te, it.tm])
                    .collect();
                let o = spectrum::OCCUPATION;
                let scales = [Lineshape::Sech, Lineshape::Lorentzian]
                    .map(|shape| stepwell::spectra::Line::new(shape, 100.0).scale_ev());
                json!({ "samples": samples, "photons": spectrum::PHOTONS,
                    "fermi_electron": o.fermi_electron_ev, "fermi_hole": o.fermi_hole_ev,
                    "lowering": o.lowering_ev, "thermal": o.thermal_ev,
                    "scale": scales })
            }
            ["solve", "single", nodes, masses, repeats] => {
                let problem = self.single(nodes, *masses == "softened");
                let (seconds, states) = timed(repeats, || problem.solve());
                let energies: Vec<f64> = states.iter().map(|state| state.energy).collect();
                let last: &[f64] = states.last().map_or(&[], |state| &state.envelope);
                json!({ "seconds": seconds, "energies": energies, "last": last })
            }
            ["solve", "valence", repeats] => {
                let (seconds, energies) = timed(repeats, || self.valence.solve());
                json!({ "seconds": seconds / valence::WAVE_NUMBERS as f64, "energies": energies })
            }
            ["solve", "spectrum", shape, repeats] => {
                let shape = match *shape {
                    "sech" => Lineshape::Sech,
                    _ => Lineshape::Lorentzian,
                };
                let emitter = spectrum::emitter(shape);
                let (seconds, points) = timed(repeats, || spectrum::solve(&emitter));
                let gain: Vec<f64> = points.iter().map(|point| point.te_gain_cm).collect();
                json!({ "seconds": seconds, "te_gain": gain })
            }
            _ => json!({ "error": "not known" }),
        }
    }

    fn single(&mut self, nodes: &str, softened: bool) -> &mut SingleBand {
        let nodes = if nodes == "2399" { 2399 } else { 599 };
        let known = |it: &(usize, bool, SingleBand)| it.0 == nodes && it.1 == softened;
        let at = self.single.iter().position(known).unwrap_or_else(|| {
            let problem = SingleBand::new(nodes, softened);
            self.single.push((nodes, softened, problem));
            self.single.len() - 1
        });
        &mut self.single[at].2
    }
}

/// Mean time of `repeats` solutions after one that warms up, and the result.
fn timed<T>(repeats: &str, mut solve: impl FnMut() -> T) -> (f64, T) {
    let repeats: u32 = repeats.parse().unwrap_or(1);
    let result = black_box(solve());
    let start = Instant::now();
    for _ in 0..repeats {
        black_box(solve());
    }
    (start.elapsed().as_secs_f64() / f64::from(repeats), result)
}
