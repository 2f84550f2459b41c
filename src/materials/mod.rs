//! Materials: parameter data with their citations, alloys, temperature, strain, refractive index.
