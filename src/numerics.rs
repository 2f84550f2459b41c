//! Numerical methods, no physics.
