//! The structure file and the validated [`Stack`] that every other module uses.

mod stack;

pub use stack::{
    Bands, Doping, Layer, Lineshape, Material, Model, Operation, Role, Stack, Substance,
};
