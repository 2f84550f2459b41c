//! Rayleigh-quotient steps and counts for eight energies at once, without a division a node.
//!
//! # Method
//!
//! φ runs from the lower wall up and ψ from the upper wall down, both through
//!
//! ```text
//!  l_a φ_{i−1} − d_i φ_i + l_b φ_{i+1} = 0 ,    d_i = T(E)[i, i] ,
//! ```
//!
//! a being the interval below node i and b the one above. Joined at node k, z = φ/φ_k below and
//! ψ/ψ_k above it, they are the vector of the twisted factorisation:
//!
//! ```text
//!  T(E) z = γ e_k ,    γ = d_k − l_a φ_{k−1}/φ_k − l_b ψ_{k+1}/ψ_k .
//! ```
//!
//! γ φ_k ψ_k is the same at every node, so that |γ| is least where |φ ψ| is largest. Both run
//! towards k, which for a bound level is the way in which they grow, so that rounding stays that of a
//! change of T by its last digits. The Rayleigh-quotient step is γ/s with s = zᵀ(−T′)z, whose sums are
//! gathered on the way, and an eigenvalue lies within |γ|/√(w_k s) of E (the size of the residual).
//! Sign changes of φ count the eigenvalues below E.
//!
//! φ and ψ grow by many powers of ten: each chunk of nodes has a power of [`LARGE`] of its own.

use super::{Chain, LANES, Lanes, Run};

/// 2²⁰⁰. The product of two values, each grown past it within one chunk, is still finite.
const LARGE: f64 = f64::from_bits((1023 + LARGE_BITS as u64) << 52);
const LARGE_BITS: i32 = 200;
/// Nodes between two looks at the size of the values.
const CHUNK: usize = 32;
/// The bound on the distance of an eigenvalue is taken larger by this: softened chains are linear
/// only as far as T′ is constant over that distance.
const CAUTION: f64 = 1.5;

/// Nodes with the same coefficients: those inside a run, or the one between two.
#[derive(Clone, Copy, Debug)]
struct Chunk {
    start: usize,
    end: usize,
    /// Runs below and above; the same one for nodes inside it.
    below: usize,
    above: usize,
}

/// Where a sweep enters a chunk.
#[derive(Clone, Copy, Debug, Default)]
struct Mark {
    /// The value at the node before the chunk.
    before: Lanes,
    /// Sum of the slope up to there.
    sum: Lanes,
    /// Powers of [`LARGE`] that values in the chunk, and `before`, are to be multiplied by (`sum`
    /// by twice as many).
    powers: [i32; LANES],
}

/// Coefficients of a run at the energies of a sweep.
#[derive(Clone, Copy, Debug)]
struct Coefficients {
    link: Lanes,
    diagonal: Lanes,
    fall: Lanes,
}

impl Coefficients {
    fn new(run: &Run, energies: &Lanes) -> Self {
        let link = energies.map(|energy| run.link(energy));
        Self {
            link,
            diagonal: std::array::from_fn(|lane| {
                link[lane] + 0.5 * (run.potential - energies[lane]) * run.length
            }),
            fall: energies.map(|energy| run.link_fall(energy)),
        }
    }
}

/// Where φ and ψ are joined.
#[derive(Clone, Copy, Debug, Default)]
struct Joint {
    node: usize,
    /// φ and ψ there, and the powers of [`LARGE`] that go with them.
    up: (f64, i32),
    down: (f64, i32),
    /// zᵀ(−T′)z.
    slope: f64,
}

/// What a sweep tells of each energy.
#[derive(Clone, Copy, Debug)]
pub(super) struct Sweep {
    /// Rayleigh-quotient step.
    pub(super) steps: Lanes,
    /// An eigenvalue lies within this of the energy.
    pub(super) reach: Lanes,
    /// Number of eigenvalues below the energy.
    pub(super) counts: [usize; LANES],
}

/// Room for the sweeps over a chain, to be used again for others: nothing is allocated where it is
/// large enough.
#[derive(Clone, Debug, Default)]
pub struct Workspace {
    chunks: Vec<Chunk>,
    coefficients: Vec<Coefficients>,
    up: Vec<Lanes>,
    down: Vec<Lanes>,
    up_marks: Vec<Mark>,
    down_marks: Vec<Mark>,
    joints: [Joint; LANES],
}

/// A sweep on its way.
struct March {
    before: Lanes,
    last: Lanes,
    sum: Lanes,
    powers: [i32; LANES],
}

impl March {
    fn new() -> Self {
        Self {
            before: [0.0; LANES],
            last: [1.0; LANES],
            sum: [0.0; LANES],
            powers: [0; LANES],
        }
    }

    fn mark(&self, mark: &mut Mark) {
        mark.before = self.before;
        mark.sum = self.sum;
        mark.powers = self.powers;
    }

    /// Adds a chunk's share of the slope: Σ w φ² + Σ fall (Δφ)².
    fn add(&mut self, weight: f64, squares: &Lanes, fall: &Lanes, rises: &Lanes) {
        for lane in 0..LANES {
            self.sum[lane] += weight * squares[lane] + fall[lane] * rises[lane];
        }
    }

    /// Values of a chunk inside a run, in the order of `values`.
    fn inside<'a, const SOFTENED: bool>(
        &mut self,
        node: &Node,
        values: impl Iterator<Item = &'a mut Lanes>,
    ) {
        let mut squares = [0.0; LANES];
        let mut rises = [0.0; LANES];
        let (mut before, mut last) = (self.before, self.last);
        for place in values {
            *place = last;
            for lane in 0..LANES {
                squares[lane] += last[lane] * last[lane];
                if SOFTENED {
                    let rise = last[lane] - before[lane];
                    rises[lane] += rise * rise;
                }
                let next = node.own[lane] * last[lane] - before[lane];
                before[lane] = last[lane];
                last[lane] = next;
            }
        }
        (self.before, self.last) = (before, last);
        self.add(node.weight, &squares, &node.fall, &rises);
    }

    /// The same for the node between two runs.
    fn across(&mut self, node: &Node, value: &mut Lanes) {
        *value = self.last;
        let squares = self.last.map(|value| value * value);
        let rises = std::array::from_fn(|lane| (self.last[lane] - self.before[lane]).powi(2));
        self.add(node.weight, &squares, &node.fall, &rises);
        for lane in 0..LANES {
            let next = node.own[lane] * self.last[lane] - node.back[lane] * self.before[lane];
            self.before[lane] = self.last[lane];
            self.last[lane] = next;
        }
    }

    fn rescale(&mut self) {
        const SMALL: f64 = 1.0 / LARGE;
        let mut large = 0u64;
        for lane in 0..LANES {
            large |= is_large(self.last[lane]) | is_large(self.before[lane]);
        }
        if large == 0 {
            return;
        }
        for lane in 0..LANES {
            if is_large(self.last[lane]) | is_large(self.before[lane]) != 0 {
                self.last[lane] *= SMALL;
                self.before[lane] *= SMALL;
                self.sum[lane] *= SMALL * SMALL;
                self.powers[lane] += 1;
            }
        }
    }
}

/// Coefficients of the nodes of a chunk: the next value is own · last − back · before.
struct Node {
    own: Lanes,
    back: Lanes,
    /// −dl/dE of the interval behind.
    fall: Lanes,
    softened: bool,
    /// The length that belongs to the node.
    weight: f64,
}

impl Node {
    /// For a sweep from run `behind` to run `ahead` of the node.
    fn new(chain: &Chain, coefficients: &[Coefficients], behind: usize, ahead: usize) -> Self {
        let (b, a) = (&coefficients[behind], &coefficients[ahead]);
        Self {
            own: std::array::from_fn(|lane| (b.diagonal[lane] + a.diagonal[lane]) / a.link[lane]),
            back: std::array::from_fn(|lane| b.link[lane] / a.link[lane]),
            fall: b.fall,
            softened: chain.runs[behind].softening > 0.0,
            weight: 0.5 * (chain.runs[behind].length + chain.runs[ahead].length),
        }
    }
}

impl Workspace {
    /// Cuts the nodes of a chain into chunks; to be called before the sweeps over it.
    pub(super) fn prepare(&mut self, chain: &Chain) {
        self.chunks.clear();
        let mut start = 0;
        for (below, run) in chain.runs.iter().enumerate() {
            let inner_end = start + run.intervals - 1;
            while start < inner_end {
                let end = (start + CHUNK).min(inner_end);
                self.chunks.push(Chunk {
                    start,
                    end,
                    below,
                    above: below,
                });
                start = end;
            }
            if below + 1 < chain.runs.len() {
                self.chunks.push(Chunk {
                    start,
                    end: start + 1,
                    below,
                    above: below + 1,
                });
                start += 1;
            }
        }
        let chunks = self.chunks.len();
        if self.up.len() < chain.nodes {
            self.up.resize(chain.nodes, [0.0; LANES]);
            self.down.resize(chain.nodes, [0.0; LANES]);
        }
        if self.up_marks.len() < chunks {
            self.up_marks.resize(chunks, Mark::default());
            self.down_marks.resize(chunks, Mark::default());
        }
    }

    /// One sweep down and one up at each of the energies.
    pub(super) fn sweep(&mut self, chain: &Chain, energies: &Lanes) -> Sweep {
        self.coefficients.clear();
        let runs = chain.runs.iter();
        self.coefficients
            .extend(runs.map(|run| Coefficients::new(run, energies)));
        self.run_down(chain);
        let (counts, places) = self.run_up(chain);
        let mut sweep = Sweep {
            steps: [0.0; LANES],
            reach: [0.0; LANES],
            counts,
        };
        for (lane, place) in places.into_iter().enumerate() {
            let (joint, gamma, weight) = self.join(chain, lane, place);
            sweep.steps[lane] = gamma / joint.slope;
            sweep.reach[lane] = CAUTION * gamma.abs() / (weight * joint.slope).sqrt();
            self.joints[lane] = joint;
        }
        sweep
    }

    fn run_down(&mut self, chain: &Chain) {
        let mut march = March::new();
        for (index, chunk) in self.chunks.iter().enumerate().rev() {
            march.mark(&mut self.down_marks[index]);
            let node = Node::new(chain, &self.coefficients, chunk.above, chunk.below);
            let values = &mut self.down[chunk.start..chunk.end];
            if chunk.below != chunk.above {
                march.across(&node, &mut values[0]);
            } else if node.softened {
                march.inside::<true>(&node, values.iter_mut().rev());
            } else {
                march.inside::<false>(&node, values.iter_mut().rev());
            }
            march.rescale();
        }
    }

    /// The sweep up: numbers of eigenvalues below, and the chunk in which |φ ψ| is largest (up to a
    /// factor of two).
    fn run_up(&mut self, chain: &Chain) -> ([usize; LANES], [usize; LANES]) {
        let mut march = March::new();
        let mut changes = [0; LANES];
        let mut places = [0; LANES];
        let mut sizes = [i32::MIN; LANES];
        for (index, chunk) in self.chunks.iter().enumerate() {
            march.mark(&mut self.up_marks[index]);
            let node = Node::new(chain, &self.coefficients, chunk.below, chunk.above);
            let values = &mut self.up[chunk.start..chunk.end];
            let first = march.last;
            if chunk.below != chunk.above {
                march.across(&node, &mut values[0]);
            } else if node.softened {
                march.inside::<true>(&node, values.iter_mut());
            } else {
                march.inside::<false>(&node, values.iter_mut());
            }
            let others = &self.down[chunk.start..chunk.end];
            let largest = look_back(values, others, &first, &march.last, &mut changes);
            let down = &self.down_marks[index].powers;
            for lane in 0..LANES {
                let size = exponent(largest[lane])
                    + LARGE_BITS * (self.up_marks[index].powers[lane] + down[lane]);
                let larger = size > sizes[lane];
                sizes[lane] = if larger { size } else { sizes[lane] };
                places[lane] = if larger { index } else { places[lane] };
            }
            march.rescale();
        }
        let counts = changes.map(|count| usize::try_from(count).expect("a count of nodes"));
        (counts, places)
    }

    /// Joins φ and ψ in a chunk, where their product is largest: the joint, γ, and the length that
    /// belongs to its node.
    fn join(&self, chain: &Chain, lane: usize, place: usize) -> (Joint, f64, f64) {
        let chunk = &self.chunks[place];
        let (up, down) = (&self.up_marks[place], &self.down_marks[place]);
        let product = |node: usize| (self.up[node][lane] * self.down[node][lane]).abs();
        let mut node = chunk.start;
        for other in chunk.start + 1..chunk.end {
            if product(other) > product(node) {
                node = other;
            }
        }
        let (below, above) = (
            &self.coefficients[chunk.below],
            &self.coefficients[chunk.above],
        );
        let weight = 0.5 * (chain.runs[chunk.below].length + chain.runs[chunk.above].length);
        let (mut phi_before, mut phi_sum) = (up.before[lane], up.sum[lane]);
        for values in &self.up[chunk.start..=node] {
            let value = values[lane];
            phi_sum += weight * value * value + below.fall[lane] * (value - phi_before).powi(2);
            phi_before = value;
        }
        let (mut psi_before, mut psi_sum) = (down.before[lane], down.sum[lane]);
        for values in self.down[node..chunk.end].iter().rev() {
            let value = values[lane];
            psi_sum += weight * value * value + above.fall[lane] * (value - psi_before).powi(2);
            psi_before = value;
        }
        let neighbour_below = if node > chunk.start {
            self.up[node - 1][lane]
        } else {
            up.before[lane]
        };
        let neighbour_above = if node + 1 < chunk.end {
            self.down[node + 1][lane]
        } else {
            down.before[lane]
        };
        let (phi, psi) = (self.up[node][lane], self.down[node][lane]);
        let gamma = below.diagonal[lane] + above.diagonal[lane]
            - below.link[lane] * neighbour_below / phi
            - above.link[lane] * neighbour_above / psi;
        let joint = Joint {
            node,
            up: (phi, up.powers[lane]),
            down: (psi, down.powers[lane]),
            // The joint's own share is in both sums.
            slope: phi_sum / (phi * phi) + psi_sum / (psi * psi) - weight,
        };
        (joint, gamma, weight)
    }

    /// The vectors of the last sweep in the first `count` lanes, Σ w z² = 1.
    pub(super) fn envelopes(&self, chain: &Chain, count: usize) -> Vec<Vec<f64>> {
        let mut envelopes: Vec<Vec<f64>> = (0..count)
            .map(|_| Vec::with_capacity(chain.nodes))
            .collect();
        for (index, chunk) in self.chunks.iter().enumerate() {
            for (lane, envelope) in envelopes.iter_mut().enumerate() {
                let joint = &self.joints[lane];
                let size = joint.slope.sqrt();
                let scale = |mark: &Mark, (at, powers): (f64, i32)| match mark.powers[lane] - powers
                {
                    0 => 1.0 / (at * size),
                    fewer => LARGE.powi(fewer) / (at * size),
                };
                let split = (joint.node + 1).clamp(chunk.start, chunk.end);
                let mut take = |values: &[Lanes], scale: f64| {
                    envelope.extend(values.iter().map(|values| scale * values[lane]));
                };
                take(
                    &self.up[chunk.start..split],
                    scale(&self.up_marks[index], joint.up),
                );
                take(
                    &self.down[split..chunk.end],
                    scale(&self.down_marks[index], joint.down),
                );
            }
        }
        if chain.runs.iter().any(|run| run.softening > 0.0) {
            // The slope is more than the norm.
            for envelope in &mut envelopes {
                chain.normalise(envelope);
            }
        }
        envelopes
    }
}

/// A second look at the values that a sweep up left in a chunk, while they are at hand: changes of
/// sign up to the value that follows, and the largest |φ ψ|.
fn look_back(
    values: &[Lanes],
    others: &[Lanes],
    first: &Lanes,
    next: &Lanes,
    changes: &mut [u64; LANES],
) -> Lanes {
    let mut largest = [0.0; LANES];
    let mut last = *first;
    for (value, other) in values.iter().zip(others) {
        for lane in 0..LANES {
            changes[lane] += (value[lane].to_bits() ^ last[lane].to_bits()) >> 63;
            let product = (value[lane] * other[lane]).abs();
            largest[lane] = if product > largest[lane] {
                product
            } else {
                largest[lane]
            };
        }
        last = *value;
    }
    for lane in 0..LANES {
        changes[lane] += (next[lane].to_bits() ^ last[lane].to_bits()) >> 63;
    }
    largest
}

/// 1 where a number is 2 to the power [`LARGE_BITS`] + 1 or more, else 0, from its bits alone.
fn is_large(value: f64) -> u64 {
    const BELOW: u64 = (2.0 * LARGE).to_bits() - 1;
    (BELOW.wrapping_sub(value.to_bits() & (u64::MAX >> 1))) >> 63
}

/// The power of two of a number that is not negative (shifted by a constant).
fn exponent(value: f64) -> i32 {
    i32::try_from(value.to_bits() >> 52).unwrap_or(i32::MAX)
}
