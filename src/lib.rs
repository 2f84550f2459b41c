//! Quantum-well active regions, from one plain-text structure file: levels, gain spectrum,
//! emission wavelength, and what an order needs.
//!
//! # The way the data flows
//!
//! ```text
//! structure file -> stack -> profile -> subbands -> carriers -> spectra     (evaluation chains these, once)
//! evaluation -> design -> sheet -> cli
//! ```
//!
//! Each module stands on a floor and uses only the floors below it; a test reads this table and
//! checks every path in the code against it.
//!
//! | floor | module | what it holds |
//! |---|---|---|
//! | 0 | [`units`] | physical constants, typed once, and the conversions derived from them |
//! | 0 | [`numerics`] | tridiagonal eigenproblems, roots, quadrature, Fermi integrals; no physics |
//! | 0 | [`source`] | text with places: what is wrong in a file, where, and how to mend it |
//! | 1 | [`materials`] | parameter data with their citations, alloys, temperature, strain law, index of refraction |
//! | 2 | [`restatement`] | one quantity said another way |
//! | 2 | [`structure`] | the structure file, and the validated stack that all others use |
//! | 3 | [`profile`] | band edges and masses along the stack |
//! | 3 | [`coherence`] | strain budget: critical thickness, balance of strains |
//! | 3 | [`diffraction`] | what X-rays see: substrate, layers, satellites, rocking curve |
//! | 4 | [`subbands`] | levels and envelopes |
//! | 5 | [`carriers`] | occupation and quasi-Fermi levels |
//! | 6 | [`spectra`] | transitions, lineshape, gain, spontaneous emission, landmarks |
//! | 7 | [`evaluation`] | the only chain of floors 3 to 6; the one record of results; remarks with advice |
//! | 8 | [`design`] | judgement of a structure: all of it asks `evaluation`, none assembles physics |
//! | 9 | [`sheet`] | numbers become text here: terminal tables, CSV, JSON, figures |
//! | 10 | [`cli`] | words in, files and exit code out; the only place that prints |
//!
//! # Example
//!
//! ```
//! use stepwell::evaluation::Evaluation;
//! use stepwell::materials::Parameters;
//! use stepwell::structure::{Overrides, read};
//!
//! let file = r#"
//!     format = 1
//!     [substrate]
//!     material = "GaAs"
//!     [[layers]]
//!     role = "barrier"
//!     material = "Al0.3Ga0.7As"
//!     thickness_nm = 30
//!     [[layers]]
//!     role = "well"
//!     material = "GaAs"
//!     thickness_nm = 8
//!     [[layers]]
//!     role = "barrier"
//!     material = "Al0.3Ga0.7As"
//!     thickness_nm = 30
//!     [operation]
//!     temperature_k = 300
//! "#;
//! let parameters = Parameters::shipped();
//! let reading = read(file, &parameters, &Overrides::default()).expect("a sound file");
//! let evaluation = Evaluation::new(&reading.stack, &parameters)?;
//! let emission = evaluation.emission();
//! // The rule of thumb for 8 nm of GaAs: 840 nm (common practice, no source).
//! assert!((emission.first_transition_nm - 840.0).abs() < 8.0);
//! let spectrum = evaluation.spectrum()?;
//! let densest = spectrum.runs.last().expect("a density");
//! println!("{:?} at {:e} per cm³", densest.te, densest.density_cm3);
//! # Ok::<(), stepwell::evaluation::Failure>(())
//! ```
//!
//! # Units
//!
//! Energies are in eV, lengths in nm, temperatures in K, masses in free-electron masses, volume
//! densities in cm⁻³, sheet densities in cm⁻², gain in cm⁻¹, current densities in A/cm². All
//! energies share one zero, the scale of the valence-band offsets in the parameter table; holes
//! are given as electron energies (a valence edge is a maximum).

pub mod carriers;
pub mod cli;
pub mod coherence;
pub mod design;
pub mod diffraction;
pub mod evaluation;
pub mod materials;
pub mod numerics;
pub mod profile;
pub mod restatement;
pub mod sheet;
pub mod source;
pub mod spectra;
pub mod structure;
pub mod subbands;
pub mod units;
