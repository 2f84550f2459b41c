//! Less work gives the same wavelengths.

use stepwell::evaluation::{Evaluation, Outline};
use stepwell::materials::Parameters;
use stepwell::structure::{Overrides, Wavelength, read};
use stepwell::units::photon_ev;

#[test]
fn an_outline_has_the_wavelengths_of_the_whole_evaluation() {
    let parameters = Parameters::shipped();
    for name in ["1310", "2300", "850", "980", "tensile"] {
        let path = format!("structures/estuary-{name}.toml");
        let text = std::fs::read_to_string(&path).expect("a shipped structure");
        let stack = read(&text, &parameters, &Overrides::default())
            .expect("sound")
            .stack;
        let whole = Evaluation::new(&stack, &parameters).expect("levels");
        let centre = Outline::of_transition(&stack, &parameters).expect("levels");
        let emission = Outline::of_emission(&stack, &parameters).expect("levels");
        assert_eq!(centre, whole.outline(), "{name}");
        let close = |kind: Wavelength, outline: &Outline| {
            let (got, want) = (outline.wavelength_nm(kind), whole.wavelength_nm(kind));
            let energy_ev = |nm: Option<f64>| photon_ev(nm.expect("a wavelength"));
            let miss_ev = energy_ev(got) - energy_ev(want);
            assert!(
                miss_ev.abs() < 5e-7,
                "{name}: {kind:?} misses by {miss_ev:e} eV"
            );
        };
        close(Wavelength::Transition, &centre);
        close(Wavelength::Transition, &emission);
        close(Wavelength::Photoluminescence, &emission);
        assert_eq!(centre.wavelength_nm(Wavelength::Photoluminescence), None);
        assert_eq!(emission.wavelength_nm(Wavelength::Gain), None);
    }
}
