//! The innermost loops: one factorisation with one step of inverse iteration, a lane a shift.
//!
//! Written for the widest vectors that every machine has, and run with wider ones where the machine
//! has them: the arithmetic is the same operation by operation, so that results are too.

#![expect(
    clippy::inline_always,
    reason = "only what is inlined is compiled for the vectors of the caller"
)]

use pulp::{Arch, NullaryFnOnce};

use super::{BlockRun, LANES, Lanes, Three, sum};

/// Three values of every node, a lane a state.
pub(super) type Columns = Vec<[Lanes; 3]>;

/// S⁻¹ of a node: 00 01 02 11 12 22.
pub(super) type Inverse = [Lanes; 6];

/// What one step of inverse iteration tells, lane by lane.
pub(super) struct Step {
    /// Number of eigenvalues below the shift.
    pub(super) below: [usize; LANES],
    /// From the shift to the Rayleigh quotient of the new vector.
    pub(super) rise: Lanes,
    /// Residual of the new vector.
    pub(super) residual: Lanes,
}

/// Numbers of eigenvalues below the shifts.
pub(super) fn counts(runs: &[BlockRun], shifts: &Lanes) -> [usize; LANES] {
    Arch::new().dispatch(Counts { runs, shifts })
}

struct Counts<'a> {
    runs: &'a [BlockRun],
    shifts: &'a Lanes,
}

impl NullaryFnOnce for Counts<'_> {
    type Output = [usize; LANES];

    #[inline(always)]
    fn call(self) -> Self::Output {
        let mut front = Front::new();
        over_nodes(
            self.runs,
            #[inline(always)]
            |_, here| front.advance(here, self.shifts),
        );
        front.below()
    }
}

/// One step of inverse iteration at the shifts; the new vectors are normalised in W.
///
/// # Arguments
///
/// * `inverse` – workspace, an entry a node
/// * `from`, `to` – the vectors before and after, an entry a node
pub(super) fn step(
    runs: &[BlockRun],
    shifts: &Lanes,
    inverse: &mut [Inverse],
    from: &[[Lanes; 3]],
    to: &mut [[Lanes; 3]],
) -> Step {
    Arch::new().dispatch(Iterate {
        runs,
        shifts,
        inverse,
        from,
        to,
    })
}

struct Iterate<'a> {
    runs: &'a [BlockRun],
    shifts: &'a Lanes,
    inverse: &'a mut [Inverse],
    from: &'a [[Lanes; 3]],
    to: &'a mut [[Lanes; 3]],
}

impl NullaryFnOnce for Iterate<'_> {
    type Output = Step;

    #[inline(always)]
    fn call(self) -> Step {
        let Self {
            runs,
            shifts,
            inverse,
            from,
            to,
        } = self;
        let below = forward(runs, shifts, inverse, from, to);
        let (overlap, norm, before) = backward(runs, inverse, from, to);
        let scale = norm.map(|norm| norm.sqrt().recip());
        for node in to.iter_mut() {
            for row in node.iter_mut() {
                for lane in 0..LANES {
                    row[lane] *= scale[lane];
                }
            }
        }
        Step {
            below,
            rise: std::array::from_fn(|lane| overlap[lane] / norm[lane]),
            residual: std::array::from_fn(|lane| {
                let rest = (before[lane] - overlap[lane] * overlap[lane] / norm[lane]).max(0.0);
                (rest / norm[lane]).sqrt()
            }),
        }
    }
}

/// Σ w a b, lane by lane.
pub(super) fn products(runs: &[BlockRun], a: &[[Lanes; 3]], b: &[[Lanes; 3]]) -> Lanes {
    Arch::new().dispatch(Products { runs, a, b })
}

struct Products<'a> {
    runs: &'a [BlockRun],
    a: &'a [[Lanes; 3]],
    b: &'a [[Lanes; 3]],
}

impl NullaryFnOnce for Products<'_> {
    type Output = Lanes;

    #[inline(always)]
    fn call(self) -> Lanes {
        let mut total = [0.0; LANES];
        over_nodes(
            self.runs,
            #[inline(always)]
            |node, here| {
                let (a, b) = (&self.a[node], &self.b[node]);
                for lane in 0..LANES {
                    let met =
                        a[0][lane] * b[0][lane] + a[1][lane] * b[1][lane] + a[2][lane] * b[2][lane];
                    total[lane] += here.weight * met;
                }
            },
        );
        total
    }
}

/// Σ weight × vector over three sets of vectors, lane by lane.
pub(super) fn combine(to: &mut [[Lanes; 3]], from: &[Columns; 3], weights: &[Lanes; 3]) {
    Arch::new().dispatch(Combine { to, from, weights });
}

struct Combine<'a> {
    to: &'a mut [[Lanes; 3]],
    from: &'a [Columns; 3],
    weights: &'a [Lanes; 3],
}

impl NullaryFnOnce for Combine<'_> {
    type Output = ();

    #[inline(always)]
    fn call(self) {
        let [first, second, third] = self.from;
        let weights = self.weights;
        let columns = first.iter().zip(second).zip(third);
        for (to, ((first, second), third)) in self.to.iter_mut().zip(columns) {
            for row in 0..3 {
                for lane in 0..LANES {
                    to[row][lane] = weights[0][lane] * first[row][lane]
                        + weights[1][lane] * second[row][lane]
                        + weights[2][lane] * third[row][lane];
                }
            }
        }
    }
}

/// Σ f u over the nodes for each of the three functions, lane by lane.
pub(super) fn projections(weighted: &[f64], columns: &[[Lanes; 3]]) -> [Lanes; 3] {
    Arch::new().dispatch(Projections { weighted, columns })
}

struct Projections<'a> {
    weighted: &'a [f64],
    columns: &'a [[Lanes; 3]],
}

impl NullaryFnOnce for Projections<'_> {
    type Output = [Lanes; 3];

    #[inline(always)]
    fn call(self) -> Self::Output {
        let mut sums = [[0.0; LANES]; 3];
        for (weight, node) in self.weighted.iter().zip(self.columns) {
            for row in 0..3 {
                for lane in 0..LANES {
                    sums[row][lane] += weight * node[row][lane];
                }
            }
        }
        sums
    }
}

/// A node with what joins it to its neighbours.
#[derive(Clone, Copy)]
pub(super) struct Here<'a> {
    /// Diagonal form.
    pub(super) diagonal: &'a Three,
    /// Length that belongs to the node.
    pub(super) weight: f64,
    /// Coupling from the node before, row that node; of the first node: not used.
    pub(super) from_before: &'a Three,
    /// Coupling to the next node; of the last: to the wall, not used.
    pub(super) to_next: &'a Three,
}

/// Visits every inner node from the lower wall up.
#[inline(always)]
pub(super) fn over_nodes(runs: &[BlockRun], mut visit: impl FnMut(usize, Here<'_>)) {
    let mut node = 0;
    for (index, run) in runs.iter().enumerate() {
        let inner = sum(&run.lower, &run.upper);
        for _ in 1..run.intervals {
            let here = Here {
                diagonal: &inner,
                weight: run.length,
                from_before: &run.coupling,
                to_next: &run.coupling,
            };
            visit(node, here);
            node += 1;
        }
        if let Some(next) = runs.get(index + 1) {
            let here = Here {
                diagonal: &sum(&run.upper, &next.lower),
                weight: 0.5 * (run.length + next.length),
                from_before: &run.coupling,
                to_next: &next.coupling,
            };
            visit(node, here);
            node += 1;
        }
    }
}

/// The same from the upper wall down.
#[inline(always)]
fn over_nodes_down(runs: &[BlockRun], nodes: usize, mut visit: impl FnMut(usize, f64, &Three)) {
    let mut node = nodes;
    for (index, run) in runs.iter().enumerate().rev() {
        if let Some(next) = runs.get(index + 1) {
            node -= 1;
            visit(node, 0.5 * (run.length + next.length), &next.coupling);
        }
        for _ in 1..run.intervals {
            node -= 1;
            visit(node, run.length, &run.coupling);
        }
    }
}

/// The front of a factorisation that has come up to a node.
struct Front {
    /// S⁻¹ of the last node.
    inverse: Inverse,
    below: [u64; LANES],
}

impl Front {
    #[inline(always)]
    fn new() -> Self {
        Self {
            // Zero under the first node, so that nothing comes from there.
            inverse: [[0.0; LANES]; 6],
            below: [0; LANES],
        }
    }

    /// S = D − ε w − Bᵀ S⁻¹ B of the next node, its inverse and its negative eigenvalues.
    #[inline(always)]
    fn advance(&mut self, here: Here<'_>, shifts: &Lanes) {
        let (d, b) = (here.diagonal, here.from_before);
        let before = self.inverse;
        for lane in 0..LANES {
            let shift = shifts[lane] * here.weight;
            let i = [0, 1, 2, 3, 4, 5].map(|entry: usize| before[entry][lane]);
            let x = times(&i, b);
            let down =
                |a: usize, c: usize| b[0][a] * x[0][c] + b[1][a] * x[1][c] + b[2][a] * x[2][c];
            let s00 = d[0][0] - shift - down(0, 0);
            let s01 = d[0][1] - down(0, 1);
            let s02 = d[0][2] - down(0, 2);
            let s11 = d[1][1] - shift - down(1, 1);
            let s12 = d[1][2] - down(1, 2);
            let s22 = d[2][2] - shift - down(2, 2);
            let c00 = s11 * s22 - s12 * s12;
            let c01 = s02 * s12 - s01 * s22;
            let c02 = s01 * s12 - s02 * s11;
            let c11 = s00 * s22 - s02 * s02;
            let c12 = s01 * s02 - s00 * s12;
            let c22 = s00 * s11 - s01 * s01;
            let determinant = s00 * c00 + s01 * c01 + s02 * c02;
            // Negative eigenvalues from the signs of the leading minors.
            let first = s00.to_bits() >> 63;
            let second = c22.to_bits() >> 63;
            let third = determinant.to_bits() >> 63;
            self.below[lane] += first + (first ^ second) + (second ^ third);
            let scale = 1.0 / determinant;
            self.inverse[0][lane] = c00 * scale;
            self.inverse[1][lane] = c01 * scale;
            self.inverse[2][lane] = c02 * scale;
            self.inverse[3][lane] = c11 * scale;
            self.inverse[4][lane] = c12 * scale;
            self.inverse[5][lane] = c22 * scale;
        }
    }

    #[inline(always)]
    fn below(&self) -> [usize; LANES] {
        self.below
            .map(|count| usize::try_from(count).expect("a count of eigenvalues"))
    }
}

/// A symmetric 3×3 matrix (00 01 02 11 12 22) times a general one.
#[inline(always)]
fn times(i: &[f64; 6], b: &Three) -> Three {
    let column = |c: usize| {
        [
            i[0] * b[0][c] + i[1] * b[1][c] + i[2] * b[2][c],
            i[1] * b[0][c] + i[3] * b[1][c] + i[4] * b[2][c],
            i[2] * b[0][c] + i[4] * b[1][c] + i[5] * b[2][c],
        ]
    };
    let (x, y, z) = (column(0), column(1), column(2));
    [0, 1, 2].map(|row: usize| [x[row], y[row], z[row]])
}

/// Factorises, keeps S⁻¹ of every node, and leaves z_i = S_i⁻¹ (w u − B_{i−1}ᵀ z_{i−1}).
#[inline(always)]
fn forward(
    runs: &[BlockRun],
    shifts: &Lanes,
    inverse: &mut [Inverse],
    from: &[[Lanes; 3]],
    to: &mut [[Lanes; 3]],
) -> [usize; LANES] {
    let mut front = Front::new();
    let mut z = [[0.0; LANES]; 3];
    over_nodes(
        runs,
        #[inline(always)]
        |node, here| {
            front.advance(here, shifts);
            let (u, b, i) = (&from[node], here.from_before, &front.inverse);
            for lane in 0..LANES {
                let (p, q, r) = (z[0][lane], z[1][lane], z[2][lane]);
                let right = |row: usize| {
                    here.weight * u[row][lane] - (b[0][row] * p + b[1][row] * q + b[2][row] * r)
                };
                let (p, q, r) = (right(0), right(1), right(2));
                z[0][lane] = i[0][lane] * p + i[1][lane] * q + i[2][lane] * r;
                z[1][lane] = i[1][lane] * p + i[3][lane] * q + i[4][lane] * r;
                z[2][lane] = i[2][lane] * p + i[4][lane] * q + i[5][lane] * r;
            }
            inverse[node] = front.inverse;
            to[node] = z;
        },
    );
    front.below()
}

/// u_i = z_i − S_i⁻¹ B_i u_{i+1} from the top down; returns uᵀ W u_old, uᵀ W u and
/// u_oldᵀ W u_old.
#[inline(always)]
fn backward(
    runs: &[BlockRun],
    inverse: &[Inverse],
    from: &[[Lanes; 3]],
    to: &mut [[Lanes; 3]],
) -> (Lanes, Lanes, Lanes) {
    let mut before = [0.0; LANES];
    let mut overlap = [0.0; LANES];
    let mut norm = [0.0; LANES];
    let mut above = [[0.0; LANES]; 3];
    over_nodes_down(
        runs,
        to.len(),
        #[inline(always)]
        |node, weight, b| {
            let (i, old, own) = (&inverse[node], &from[node], &mut to[node]);
            for lane in 0..LANES {
                let (p, q, r) = (above[0][lane], above[1][lane], above[2][lane]);
                let (p, q, r) = (
                    b[0][0] * p + b[0][1] * q + b[0][2] * r,
                    b[1][0] * p + b[1][1] * q + b[1][2] * r,
                    b[2][0] * p + b[2][1] * q + b[2][2] * r,
                );
                let v0 = own[0][lane] - (i[0][lane] * p + i[1][lane] * q + i[2][lane] * r);
                let v1 = own[1][lane] - (i[1][lane] * p + i[3][lane] * q + i[4][lane] * r);
                let v2 = own[2][lane] - (i[2][lane] * p + i[4][lane] * q + i[5][lane] * r);
                let met = old[0][lane] * v0 + old[1][lane] * v1 + old[2][lane] * v2;
                let square = old[0][lane] * old[0][lane]
                    + old[1][lane] * old[1][lane]
                    + old[2][lane] * old[2][lane];
                before[lane] += weight * square;
                overlap[lane] += weight * met;
                norm[lane] += weight * (v0 * v0 + v1 * v1 + v2 * v2);
                own[0][lane] = v0;
                own[1][lane] = v1;
                own[2][lane] = v2;
            }
            above = *own;
        },
    );
    (overlap, norm, before)
}
