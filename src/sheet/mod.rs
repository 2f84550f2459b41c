//! Numbers become text here, and nowhere else.

pub mod figure;
