//! Numerical methods, no physics: tridiagonal eigenproblems, roots, quadrature, Fermi integrals.

pub mod block;
pub mod chain;
pub mod clusters;
pub mod contour;
pub mod fermi;
pub mod general;
pub mod quadrature;
pub mod roots;
pub mod survey;
