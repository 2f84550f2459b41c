//! Physical constants (CODATA 2022), typed once, and every factor derived from them.

pub mod air;

/// Elementary charge, C (exact).
pub const ELEMENTARY_CHARGE_C: f64 = 1.602176634e-19;
/// Planck constant, J s (exact).
pub const PLANCK_J_S: f64 = 6.62607015e-34;
/// Boltzmann constant, J/K (exact).
pub const BOLTZMANN_J_K: f64 = 1.380649e-23;
/// Speed of light in vacuum, m/s (exact).
pub const LIGHT_SPEED_M_S: f64 = 299792458.0;
/// Electron rest mass, kg (CODATA 2022).
pub const ELECTRON_MASS_KG: f64 = 9.1093837139e-31;
/// Vacuum permittivity, F/m (CODATA 2022).
pub const VACUUM_PERMITTIVITY_F_M: f64 = 8.8541878188e-12;

/// Reduced Planck constant, J s.
pub const HBAR_J_S: f64 = PLANCK_J_S / (2.0 * std::f64::consts::PI);
/// Reduced Planck constant, eV s.
pub const HBAR_EV_S: f64 = HBAR_J_S / ELEMENTARY_CHARGE_C;
/// hc, eV nm: wavelength in nm is this over the photon energy in eV.
pub const HC_EV_NM: f64 = PLANCK_J_S * LIGHT_SPEED_M_S / ELEMENTARY_CHARGE_C * 1e9;
/// Boltzmann constant, eV/K.
pub const BOLTZMANN_EV_K: f64 = BOLTZMANN_J_K / ELEMENTARY_CHARGE_C;
/// ħ²/2m₀, eV nm².
pub const HBAR2_OVER_2M0_EV_NM2: f64 =
    HBAR_J_S * HBAR_J_S / (2.0 * ELECTRON_MASS_KG) / ELEMENTARY_CHARGE_C * 1e18;
/// m₀/(π ħ²), cm⁻² eV⁻¹: the step of the density of states of one subband of mass m₀.
pub const SUBBAND_DENSITY_PER_CM2_EV: f64 =
    1e14 / (2.0 * std::f64::consts::PI * HBAR2_OVER_2M0_EV_NM2);
/// Fine-structure constant.
pub const FINE_STRUCTURE: f64 = ELEMENTARY_CHARGE_C * ELEMENTARY_CHARGE_C
    / (4.0 * std::f64::consts::PI * VACUUM_PERMITTIVITY_F_M * HBAR_J_S * LIGHT_SPEED_M_S);
/// Zero of the Celsius scale, K (exact).
pub const CELSIUS_ZERO_K: f64 = 273.15;

/// Thermal energy kT in eV at a temperature in K.
#[must_use]
pub fn thermal_ev(temperature_k: f64) -> f64 {
    BOLTZMANN_EV_K * temperature_k
}

/// Vacuum wavelength in nm of a photon energy in eV.
#[must_use]
pub fn wavelength_nm(photon_ev: f64) -> f64 {
    HC_EV_NM / photon_ev
}

/// Photon energy in eV of a vacuum wavelength in nm.
#[must_use]
pub fn photon_ev(wavelength_nm: f64) -> f64 {
    HC_EV_NM / wavelength_nm
}
