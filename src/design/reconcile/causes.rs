//! What may have gone wrong by itself.

use super::problem::{Problem, STEP};
use super::{Datum, ReconcileError};
use crate::design::anchored::Anchored;
use crate::design::unknown::{Unknown, every_cause};
use nalgebra::DVector;

/// Prior error of the temperature of a bench, K (common practice).
const BENCH_K: f64 = 3.0;

/// One thing that may have gone wrong by itself.
#[derive(Clone, Debug, PartialEq)]
pub struct SingleCause {
    /// What: `well.thickness`, `growth rate`, `bench temperature`.
    pub name: String,
    /// Its unit; empty for a fraction.
    pub unit: &'static str,
    /// The amount that explains the data best.
    pub amount: f64,
    /// Its error.
    pub sigma: f64,
    /// What it leaves of each datum, in sigmas, in the order of the deviations.
    pub leaves: Vec<f64>,
    /// Sum of their squares.
    pub chi_square: f64,
    /// The amount in sigmas of what is usual.
    pub unusual: f64,
}

/// A single cause before it is fitted.
struct Suspect {
    name: String,
    unit: &'static str,
    /// What is usual of it, one sigma.
    usual: f64,
    acts: Act,
}

enum Act {
    Unknowns(Vec<(Unknown, f64)>),
    BenchTemperature,
    BenchWavelength,
}

impl Suspect {
    fn predicted(
        &self,
        problem: &Problem<'_>,
        at_order: Option<&Anchored<'_>>,
        ordered: &[f64],
        amount: f64,
    ) -> Result<Vec<f64>, ReconcileError> {
        let mut stack = problem.stack.clone();
        match &self.acts {
            Act::Unknowns(unknowns) => {
                for (unknown, per_amount) in unknowns {
                    unknown.shift(&mut stack, amount * per_amount);
                }
            }
            Act::BenchTemperature => {
                stack.operation.temperature_k = (stack.operation.temperature_k + amount).max(1.0);
            }
            Act::BenchWavelength => {
                let mut predicted = ordered.to_vec();
                if let Some(peak_nm) = problem
                    .place(Datum::Pl)
                    .and_then(|index| predicted.get_mut(index))
                {
                    *peak_nm += amount;
                }
                return Ok(predicted);
            }
        }
        problem.predicted(stack, at_order)
    }
}

/// Each possible cause by itself, with the amount that explains the data best.
///
/// # Arguments
///
/// * `at_order` – the model about the order
/// * `ordered` – what it gives for the order
pub(super) fn causes(
    problem: &Problem<'_>,
    unknowns: &[Unknown],
    at_order: Option<&Anchored<'_>>,
    ordered: &[f64],
) -> Result<Vec<SingleCause>, ReconcileError> {
    let mut found = Vec::new();
    for suspect in suspects(problem, unknowns) {
        let misses = |amount: f64| -> Result<DVector<f64>, ReconcileError> {
            let predicted = suspect.predicted(problem, at_order, ordered, amount)?;
            Ok(problem.misses(&predicted))
        };
        let step = STEP * suspect.usual;
        let slope = (misses(-step)? - misses(step)?) / (2.0 * step);
        let weight = slope.norm_squared();
        // What moves no datum by a hundredth of its error within what is usual explains nothing.
        if weight.sqrt() * suspect.usual < 1e-2 {
            continue;
        }
        let mut amount = 0.0;
        let mut left = problem.misses(ordered);
        for _ in 0..6 {
            let step = slope.dot(&left) / weight;
            amount += step.clamp(-10.0 * suspect.usual, 10.0 * suspect.usual);
            left = misses(amount)?;
            if step.abs() < 1e-3 * suspect.usual {
                break;
            }
        }
        found.push(SingleCause {
            name: suspect.name,
            unit: suspect.unit,
            amount,
            sigma: weight.sqrt().recip(),
            chi_square: left.norm_squared(),
            unusual: amount / suspect.usual,
            leaves: left.iter().copied().collect(),
        });
    }
    let cost = |cause: &SingleCause| cause.chi_square + cause.unusual * cause.unusual;
    found.sort_by(|a, b| cost(a).total_cmp(&cost(b)));
    Ok(found)
}

fn suspects(problem: &Problem<'_>, unknowns: &[Unknown]) -> Vec<Suspect> {
    let mut suspects: Vec<Suspect> = every_cause(&problem.stack, unknowns)
        .into_iter()
        .map(|(name, moved)| {
            let first = &moved[0];
            // A rate is said in per cent, all else in the unit of the unknown.
            let (unit, usual, per_amount): (_, _, fn(&Unknown) -> f64) = if moved.len() > 1 {
                let percent = 100.0 * first.prior_sigma / first.ordered;
                ("%", percent, |unknown| 0.01 * unknown.ordered)
            } else {
                (first.unit(), first.prior_sigma, |_| 1.0)
            };
            Suspect {
                name,
                unit,
                usual,
                acts: Act::Unknowns(
                    moved
                        .into_iter()
                        .map(|unknown| {
                            let per_amount = per_amount(&unknown);
                            (unknown, per_amount)
                        })
                        .collect(),
                ),
            }
        })
        .collect();
    if let Some(index) = problem.place(Datum::Pl) {
        suspects.push(Suspect {
            name: "bench temperature".to_owned(),
            unit: "K",
            usual: BENCH_K,
            acts: Act::BenchTemperature,
        });
        suspects.push(Suspect {
            name: "model or bench wavelength".to_owned(),
            unit: "nm",
            usual: problem.sigmas[index],
            acts: Act::BenchWavelength,
        });
    }
    suspects
}
