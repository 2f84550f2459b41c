//! The period of the wells as X-rays see it.

use crate::materials::{Crystal, Offsets, Parameters};
use crate::structure::{Layer, Material, Role, Stack, Substance};

/// Temperature at which diffraction is measured, K. Mismatches of compounds on each other change by
/// a few ppm per 10 K, below what a wafer is measured to.
const MEASURED_AT_K: f64 = 300.0;

/// Period and mean lattice of the layers from the first well up to the last.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Superlattice {
    /// Mean distance from well to well, nm.
    pub period_nm: f64,
    /// Mean mismatch of the lattice planes parallel to the surface, ppm; positive where the layers
    /// are compressed.
    pub perpendicular_ppm: f64,
    /// Mean mismatch of the relaxed lattice constants, ppm.
    pub relaxed_ppm: f64,
}

impl Superlattice {
    /// That of a stack; `None` where it has fewer than two wells.
    ///
    /// # Equation
    ///
    /// Satellites are spaced by the period Λ. The zero order lies at the mean spacing of the planes
    /// of one period, which holds t_i/a⊥_i cells of each layer:
    ///
    /// ```text
    ///  ⟨a⊥⟩ = Σ t_i / Σ (t_i/a⊥_i)     a⊥ = a (1 + ε⊥)     ε⊥ = −2 (C12/C11) (a_s − a)/a
    ///  Δ⊥ = ⟨a⊥⟩/a_s − 1               Δ = Σ t_i (a_i/a_s − 1) / Σ t_i
    /// ```
    ///
    /// A graded layer counts with the mean of its two ends.
    ///
    /// # Reference
    ///
    /// V. S. Speriosu, T. Vreeland, J. Appl. Phys. 56, 1591 (1984).
    #[must_use]
    pub fn of(stack: &Stack, parameters: &Parameters) -> Option<Self> {
        let is_well = |layer: &Layer| layer.role == Role::Well;
        let first = stack.layers.iter().position(is_well)?;
        let last = stack.layers.iter().rposition(is_well)?;
        let wells = stack.well_count();
        if wells < 2 {
            return None;
        }
        let crystal = |material: &Material| match &material.substance {
            Substance::Alloy(composition) => {
                parameters.crystal(composition, MEASURED_AT_K, Offsets::Table)
            }
            Substance::Own { crystal, .. } => *crystal,
        };
        let substrate_nm = crystal(&stack.substrate).lattice_nm;
        // Lattice constants along growth and relaxed.
        let lattices = |crystal: &Crystal| {
            let in_plane = (substrate_nm - crystal.lattice_nm) / crystal.lattice_nm;
            let perpendicular = -2.0 * crystal.c12_gpa / crystal.c11_gpa * in_plane;
            (
                crystal.lattice_nm * (1.0 + perpendicular),
                crystal.lattice_nm,
            )
        };
        let (mut thickness, mut cells, mut relaxed) = (0.0, 0.0, 0.0);
        for layer in &stack.layers[first..last] {
            let lower = lattices(&crystal(&layer.material));
            let upper = layer
                .grade_to
                .as_ref()
                .map_or(lower, |end| lattices(&crystal(end)));
            thickness += layer.thickness_nm;
            cells += layer.thickness_nm / (0.5 * (lower.0 + upper.0));
            relaxed += layer.thickness_nm * (0.5 * (lower.1 + upper.1) / substrate_nm - 1.0);
        }
        Some(Self {
            period_nm: thickness / (wells - 1) as f64,
            perpendicular_ppm: 1e6 * (thickness / cells / substrate_nm - 1.0),
            relaxed_ppm: 1e6 * relaxed / thickness,
        })
    }
}
