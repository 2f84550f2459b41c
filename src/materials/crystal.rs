//! One crystal's numbers and its band edges under the strain of a (001) substrate.

/// The numbers of one unstrained zincblende crystal at one temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crystal {
    /// Lattice constant, nm.
    pub lattice_nm: f64,
    /// Direct gap (Γ), eV.
    pub gap_ev: f64,
    /// Gap to the X valleys, eV; infinite where the material is given by its own numbers.
    pub gap_x_ev: f64,
    /// Gap to the L valleys, eV; infinite where the material is given by its own numbers.
    pub gap_l_ev: f64,
    /// Valence-band top on the common offset scale, eV.
    pub valence_edge_ev: f64,
    /// Spin-orbit splitting, eV.
    pub split_off_ev: f64,
    /// Electron mass at the band edge, free-electron masses.
    pub electron_mass: f64,
    /// Luttinger parameters γ1, γ2, γ3.
    pub luttinger: [f64; 3],
    /// Kane energy Ep, eV.
    pub kane_energy_ev: f64,
    /// Conduction deformation potential, eV: the edge moves by `ac_ev`·tr(ε).
    pub ac_ev: f64,
    /// Valence deformation potential, eV, written positive: the edge moves by +`av_ev`·tr(ε).
    pub av_ev: f64,
    /// Shear deformation potential, eV (negative).
    pub b_ev: f64,
    /// Elastic constant C11, GPa.
    pub c11_gpa: f64,
    /// Elastic constant C12, GPa.
    pub c12_gpa: f64,
}

/// The sense of a strain, by its name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sense {
    /// The relaxed layer would be wider than the substrate.
    Compressive,
    /// The relaxed layer would be narrower than the substrate.
    Tensile,
    /// No strain to speak of (below 1e-9).
    Matched,
}

impl Sense {
    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Compressive => "compressive",
            Self::Tensile => "tensile",
            Self::Matched => "matched",
        }
    }
}

/// Band edges of a crystal grown coherently on a (001) substrate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Edges {
    /// In-plane strain (a_substrate − a)/a; negative is compressive.
    pub in_plane_strain: f64,
    /// Conduction edge, eV.
    pub conduction_ev: f64,
    /// Heavy-hole edge, eV.
    pub heavy_ev: f64,
    /// Light-hole edge, eV, with the split-off band taken into account.
    pub light_ev: f64,
    /// Hydrostatic part of the valence shift moved the band to here: E_v − P_ε, eV.
    pub valence_mean_ev: f64,
    /// Shear energy Q_ε = −b (ε∥ − ε⊥), eV.
    pub shear_ev: f64,
}

impl Edges {
    /// The gap of the strained layer: conduction edge less the higher of the two hole edges, eV.
    #[must_use]
    pub fn gap_ev(&self) -> f64 {
        self.conduction_ev - self.heavy_ev.max(self.light_ev)
    }

    /// Size of the in-plane strain in per cent, never negative.
    #[must_use]
    pub fn strain_percent(&self) -> f64 {
        100.0 * self.in_plane_strain.abs()
    }

    /// Its sense.
    #[must_use]
    pub fn sense(&self) -> Sense {
        if self.in_plane_strain.abs() < 1e-9 {
            Sense::Matched
        } else if self.in_plane_strain < 0.0 {
            Sense::Compressive
        } else {
            Sense::Tensile
        }
    }
}

impl Crystal {
    /// Band edges under the biaxial strain of a (001) substrate.
    ///
    /// # Equation
    ///
    /// ```text
    ///  ε∥ = (a_s − a)/a      ε⊥ = −2 (C12/C11) ε∥      tr = 2 ε∥ + ε⊥
    ///  E_c  → E_c + a_c tr   P = −a_v tr               Q = −b (ε∥ − ε⊥)
    ///  E_hh = E_v − P − Q
    ///  E_lh = E_v − P + ½ (Q − Δ + √(Δ² + 2 Δ Q + 9 Q²))
    /// ```
    ///
    /// with a_v > 0 here (the valence edge moves by +a_v tr), so that compression widens the gap.
    ///
    /// # Arguments
    ///
    /// * `substrate_lattice_nm` – lattice constant of the substrate at the same temperature, nm
    ///
    /// # Reference
    ///
    /// S. L. Chuang, Phys. Rev. B 43, 9649 (1991).
    #[must_use]
    pub fn on(&self, substrate_lattice_nm: f64) -> Edges {
        let in_plane = (substrate_lattice_nm - self.lattice_nm) / self.lattice_nm;
        let perpendicular = -2.0 * self.c12_gpa / self.c11_gpa * in_plane;
        let trace = 2.0 * in_plane + perpendicular;
        let shear = -self.b_ev * (in_plane - perpendicular);
        let spin_orbit = self.split_off_ev;
        let mean = self.valence_edge_ev + self.av_ev * trace;
        let root =
            (spin_orbit * spin_orbit + 2.0 * spin_orbit * shear + 9.0 * shear * shear).sqrt();
        Edges {
            in_plane_strain: in_plane,
            conduction_ev: self.valence_edge_ev + self.gap_ev + self.ac_ev * trace,
            heavy_ev: mean - shear,
            light_ev: mean + 0.5 * (shear - spin_orbit + root),
            valence_mean_ev: mean,
            shear_ev: shear,
        }
    }

    /// Whether the direct gap is not wider than those to the X and L valleys.
    #[must_use]
    pub fn is_direct(&self) -> bool {
        self.gap_ev <= self.gap_x_ev.min(self.gap_l_ev)
    }

    /// Mass of the heavy hole along growth, 1/(γ1 − 2 γ2).
    #[must_use]
    pub fn heavy_mass_growth(&self) -> f64 {
        (self.luttinger[0] - 2.0 * self.luttinger[1]).recip()
    }

    /// Mass of the light hole along growth, 1/(γ1 + 2 γ2).
    #[must_use]
    pub fn light_mass_growth(&self) -> f64 {
        (self.luttinger[0] + 2.0 * self.luttinger[1]).recip()
    }
}
