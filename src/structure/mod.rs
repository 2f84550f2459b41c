//! The structure file and the validated [`Stack`] that every other module uses.
