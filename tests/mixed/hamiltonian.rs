//! The valence Hamiltonian in X, Y, Z times spin: complex, six bands at once, written from its
//! definition and not from the blocks.
//!
//! With the wave number k along x in the plane and L = −(γ1+4γ2), M = −(γ1−2γ2), N = −6γ3 in units
//! of ħ²/2m₀,
//!
//! ```text
//!  H_xx = L k² + kz M kz     H_yy = M k² + kz M kz     H_zz = M k² + kz L kz
//!  H_xz = k (N₊ kz + kz N₋)  H_xy = H_yz = 0           N₋ = M − 1, N₊ = N − N₋
//! ```
//!
//! along [100]. Along [110], in axes turned with the wave number, (L+M+N)/2 and (L+M−N)/2 stand in
//! place of L and M in the first two k². What is the same in all directions is the mean of the two
//! (all else goes as the fourfold harmonic, which changes its sign): the axial model.
//!
//! Sources: J. M. Luttinger, W. Kohn, Phys. Rev. 97, 869 (1955); G. Dresselhaus, A. F. Kip,
//! C. Kittel, Phys. Rev. 98, 368 (1955); order of the operators: B. A. Foreman, Phys. Rev. B 48,
//! 4964 (1993); strain: G. E. Pikus, G. L. Bir, Sov. Phys. Solid State 1, 1502 (1960).

use crate::recipe::{AV_EV, B_EV, BARRIER, C11_GPA, C12_GPA, Numbers, STEP, WELL};
use nalgebra::{Complex, DMatrix, SymmetricEigen};
use stepwell::materials::Crystal;
use stepwell::numerics::block::BlockChain;
use stepwell::profile::Strained;
use stepwell::subbands::interval;
use stepwell::units::HBAR2_OVER_2M0_EV_NM2;

type Matrix = DMatrix<Complex<f64>>;

/// Coefficients of H between two of the six states: c0 ∫ab + c2 ∫a′b′ + cp ∫ab′ + cm ∫a′b.
#[derive(Clone, Default)]
struct Form {
    c0: [[Complex<f64>; 6]; 6],
    c2: [[f64; 6]; 6],
    cp: [[Complex<f64>; 6]; 6],
    cm: [[Complex<f64>; 6]; 6],
}

/// States are numbered X, Y, Z with spin up, then with spin down.
fn form(numbers: &Numbers, k_per_nm: f64) -> Form {
    let unit = HBAR2_OVER_2M0_EV_NM2;
    let (i, k) = (Complex::<f64>::i(), k_per_nm);
    let [g1, g2, g3] = numbers.luttinger;
    let (l, m, n) = (-(g1 + 4.0 * g2), -(g1 - 2.0 * g2), -6.0 * g3);
    let minus = m - 1.0;
    let plus = n - minus;
    let along = 0.5 * (l + 0.5 * (l + m + n));
    let across = 0.5 * (m + 0.5 * (l + m - n));
    let in_plane = numbers.strain;
    let growth = -2.0 * C12_GPA / C11_GPA * in_plane;
    let hydrostatic = AV_EV * (2.0 * in_plane + growth);
    let mut form = Form::default();
    for spin in [0, 3] {
        let (x, y, z) = (spin, spin + 1, spin + 2);
        for (state, square, slope, strains) in [
            (x, along, m, in_plane - growth),
            (y, across, m, in_plane - growth),
            (z, m, l, 2.0 * (growth - in_plane)),
        ] {
            let edge = numbers.valence_edge_ev + hydrostatic + B_EV * strains;
            form.c0[state][state] += Complex::from(edge + unit * square * k * k);
            form.c2[state][state] = unit * slope;
        }
        // <X| k (N₊ kz + kz N₋) |Z> with kz = −i d, which acts to the left as its own adjoint.
        form.cp[x][z] = -i * (k * unit * plus);
        form.cm[x][z] = i * (k * unit * minus);
        form.cp[z][x] = -i * (k * unit * minus);
        form.cm[z][x] = i * (k * unit * plus);
    }
    // (Δ/3) (L·σ − 1): zero for the four states of J = 3/2, −Δ for the two of J = 1/2.
    let third = numbers.split_off_ev / 3.0;
    for (a, b, c) in [(0, 1, 2), (1, 2, 0), (2, 0, 1)] {
        for spin in 0..2 {
            for other in 0..2 {
                let sigma = pauli(c, spin, other);
                // (L_c)_ab = −i ε_cab.
                form.c0[3 * spin + a][3 * other + b] += -i * third * sigma;
                form.c0[3 * spin + b][3 * other + a] += i * third * sigma;
            }
        }
    }
    for state in 0..6 {
        form.c0[state][state] -= Complex::from(third);
    }
    form
}

fn pauli(axis: usize, row: usize, column: usize) -> Complex<f64> {
    let (one, i) = (Complex::<f64>::from(1.0), Complex::<f64>::i());
    let none = Complex::from(0.0);
    let matrix = match axis {
        0 => [[none, one], [one, none]],
        1 => [[none, -i], [i, none]],
        _ => [[one, none], [none, -one]],
    };
    matrix[row][column]
}

fn rising(matrix: Matrix) -> Vec<f64> {
    let deviation = (&matrix - matrix.adjoint()).camax();
    assert!(deviation < 1e-9, "not Hermitian by {deviation}");
    let mut values: Vec<f64> = SymmetricEigen::new(matrix)
        .eigenvalues
        .iter()
        .copied()
        .collect();
    values.sort_by(f64::total_cmp);
    values
}

/// The six bands of a uniform crystal at (k, 0, kz), eV, rising.
pub(crate) fn bulk_ev(numbers: &Numbers, k_per_nm: f64, kz_per_nm: f64) -> Vec<f64> {
    let form = form(numbers, k_per_nm);
    let i = Complex::<f64>::i();
    rising(Matrix::from_fn(6, 6, |a, b| {
        // A plane wave turns d into i kz on its right and −i kz on its left.
        form.c0[a][b]
            + Complex::from(form.c2[a][b] * kz_per_nm * kz_per_nm)
            + i * kz_per_nm * (form.cp[a][b] - form.cm[a][b])
    }))
}

/// All eigenvalues of the six bands between hard walls, eV, rising: equal intervals (numbers,
/// length in nm) by finite volumes.
fn levels_ev(intervals: &[(Numbers, f64)], k_per_nm: f64) -> Vec<f64> {
    let nodes = intervals.len() - 1;
    let mut matrix = Matrix::zeros(6 * nodes, 6 * nodes);
    let node_nm: Vec<f64> = intervals
        .windows(2)
        .map(|pair| 0.5 * (pair[0].1 + pair[1].1))
        .collect();
    for (index, (numbers, nm)) in intervals.iter().enumerate() {
        let form = form(numbers, k_per_nm);
        // Values and slopes at the two ends: ∫ab, ∫a′b′, ∫ab′, ∫a′b.
        for lower in 0..2 {
            for upper in 0..2 {
                // Interval `index` lies between the nodes index − 1 and index.
                let (Some(row), Some(column)) = (
                    (index + lower).checked_sub(1),
                    (index + upper).checked_sub(1),
                ) else {
                    continue;
                };
                if row >= nodes || column >= nodes {
                    continue;
                }
                let slope = |end: usize| if end == 0 { -1.0 } else { 1.0 };
                let product = if lower == upper { 0.5 * nm } else { 0.0 };
                let slopes = slope(lower) * slope(upper) / nm;
                let scale = (node_nm[row] * node_nm[column]).sqrt().recip();
                for a in 0..6 {
                    for b in 0..6 {
                        matrix[(6 * row + a, 6 * column + b)] += (form.c0[a][b] * product
                            + Complex::from(form.c2[a][b] * slopes)
                            + form.cp[a][b] * (0.5 * slope(upper))
                            + form.cm[a][b] * (0.5 * slope(lower)))
                            * scale;
                    }
                }
            }
        }
    }
    rising(matrix)
}

/// The numbers of a layer as the blocks take them.
pub(crate) fn strained(numbers: &Numbers) -> Strained {
    let crystal = Crystal {
        lattice_nm: 1.0 / (1.0 + numbers.strain),
        gap_ev: 1.0,
        gap_x_ev: f64::INFINITY,
        gap_l_ev: f64::INFINITY,
        valence_edge_ev: numbers.valence_edge_ev,
        split_off_ev: numbers.split_off_ev,
        electron_mass: 0.05,
        luttinger: numbers.luttinger,
        kane_energy_ev: 24.0,
        ac_ev: -5.0,
        av_ev: AV_EV,
        b_ev: B_EV,
        c11_gpa: C11_GPA,
        c12_gpa: C12_GPA,
    };
    Strained {
        crystal,
        edges: crystal.on(1.0),
    }
}

/// All eigenvalues of a chain, rising, from a dense solver.
pub(crate) fn dense(chain: &BlockChain) -> Vec<f64> {
    let size = 3 * chain.nodes();
    let mut matrix = DMatrix::<f64>::zeros(size, size);
    for (row, column, value) in chain.entries() {
        matrix[(row, column)] = value;
        matrix[(column, row)] = value;
    }
    let mut values: Vec<f64> = SymmetricEigen::new(matrix)
        .eigenvalues
        .iter()
        .copied()
        .collect();
    values.sort_by(f64::total_cmp);
    values
}

/// Two real blocks of three hold exactly what six complex bands hold, interfaces included.
#[test]
fn two_blocks_are_the_six_bands() {
    let mut intervals = Vec::new();
    for (numbers, nm, count) in [
        (BARRIER, 0.9, 6),
        (WELL, 0.6, 8),
        (STEP, 0.5, 5),
        (BARRIER, 0.8, 7),
    ] {
        intervals.extend(std::iter::repeat_n((numbers, nm), count));
    }
    for k_per_nm in [0.0, 0.3, 0.8] {
        let whole = levels_ev(&intervals, k_per_nm);
        let mut blocks = Vec::new();
        let mut apart: f64 = 0.0;
        for sign in [1.0, -1.0] {
            let runs = intervals
                .iter()
                .map(|(numbers, nm)| interval(&strained(numbers), 0.0, *nm, k_per_nm, sign))
                .collect();
            let own: Vec<f64> = dense(&BlockChain::new(runs)).iter().map(|e| -e).collect();
            if let Some(first) = blocks.get(..own.len()) {
                apart = own
                    .iter()
                    .zip(first)
                    .map(|(a, b): (&f64, &f64)| (a - b).abs())
                    .fold(apart, f64::max);
            }
            blocks.extend(own);
        }
        assert!(
            (apart > 1e-3) == (k_per_nm > 0.0),
            "the blocks of a lopsided stack are {apart} apart at {k_per_nm}/nm"
        );
        blocks.sort_by(f64::total_cmp);
        assert_eq!(whole.len(), blocks.len());
        let worst = whole
            .iter()
            .zip(&blocks)
            .map(|(a, b)| (a - b).abs())
            .fold(0.0, f64::max);
        assert!(worst < 1e-11, "{worst} eV at {k_per_nm}/nm");
    }
}

/// The definition itself where it has a closed form: heavy, light and split-off edge under strain
/// and their masses along growth.
#[test]
fn edges_of_the_six_bands_are_the_closed_form() {
    for numbers in [WELL, BARRIER, STEP] {
        let edges = strained(&numbers).edges;
        let bands = bulk_ev(&numbers, 0.0, 0.0);
        let so =
            2.0 * edges.valence_mean_ev + edges.shear_ev - numbers.split_off_ev - edges.light_ev;
        let mut wanted = [
            edges.heavy_ev,
            edges.heavy_ev,
            edges.light_ev,
            edges.light_ev,
            so,
            so,
        ];
        wanted.sort_by(f64::total_cmp);
        for (got, want) in bands.iter().zip(wanted) {
            assert!((got - want).abs() < 1e-12, "{got} {want}");
        }
        let kz = 0.7;
        let heavy = edges.heavy_ev
            - HBAR2_OVER_2M0_EV_NM2 * (numbers.luttinger[0] - 2.0 * numbers.luttinger[1]) * kz * kz;
        let nearest = bulk_ev(&numbers, 0.0, kz)
            .iter()
            .map(|band| (band - heavy).abs())
            .fold(f64::INFINITY, f64::min);
        assert!(nearest < 1e-12, "{nearest}");
    }
}
