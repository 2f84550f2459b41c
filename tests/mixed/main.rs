//! Mixed valence bands: an independent Hamiltonian, limits that are known, completeness of the
//! states, and the spectra that follow.

mod against_single;
mod completeness;
mod hamiltonian;
mod limits;
mod recipe;
mod spectra;
