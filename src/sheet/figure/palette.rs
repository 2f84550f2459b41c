//! Inks and dashes: told apart by readers who confuse hues, and on a page printed in grey.

/// What a line or an area is drawn with.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Ink {
    /// The ink of axes and text.
    #[default]
    Black,
    /// For what stands in the background.
    Grey,
    /// One of eight unordered colours, each with a luminance of its own; higher numbers start
    /// again from the first.
    Colour(usize),
    /// Member `step` (from 0) of a family of `of` ordered ones (densities, temperatures), from
    /// dark to light.
    Ramp {
        /// Which of them.
        step: usize,
        /// How many there are.
        of: usize,
    },
}

/// Eight colours at least six steps of CIE lightness apart; the least difference between any two,
/// for normal sight and for each of the three kinds of colour blindness, is tested below.
const COLOURS: [[u8; 3]; 8] = [
    [0x0a, 0x0a, 0x9b],
    [0x9e, 0x60, 0x0a],
    [0x13, 0x80, 0xde],
    [0x60, 0x18, 0x70],
    [0x23, 0x69, 0x6a],
    [0xc5, 0xaa, 0x0b],
    [0x56, 0x47, 0x25],
    [0x7a, 0xa3, 0x6d],
];

/// Stations of the ordered family, of rising lightness.
const RAMP: [[u8; 3]; 4] = [
    [0x1d, 0x14, 0x5c],
    [0x1f, 0x55, 0x9e],
    [0x2a, 0x93, 0x8c],
    [0xcb, 0xa5, 0x1e],
];

/// Red, green, blue.
pub(crate) type Rgb = [u8; 3];

pub(crate) const BLACK: Rgb = [0x1a, 0x1a, 0x1a];
pub(crate) const GREY: Rgb = [0x76, 0x76, 0x76];
pub(crate) const PALE: Rgb = [0xe4, 0xe4, 0xe4];
pub(crate) const WHITE: Rgb = [0xff, 0xff, 0xff];

impl Ink {
    /// The colour of lines and areas.
    pub(crate) fn rgb(self) -> Rgb {
        match self {
            Self::Black => BLACK,
            Self::Grey => GREY,
            Self::Colour(index) => COLOURS[index % COLOURS.len()],
            Self::Ramp { step, of } => {
                let last = of.saturating_sub(1).max(1);
                let along = (step.min(last) as f64 / last as f64) * (RAMP.len() - 1) as f64;
                let station = (0..RAMP.len() - 1)
                    .rev()
                    .find(|at| *at as f64 <= along)
                    .unwrap_or(0);
                mix(RAMP[station], RAMP[station + 1], along - station as f64)
            }
        }
    }

    /// The same hue dark enough to read small text in.
    pub(crate) fn text_rgb(self) -> Rgb {
        let mut rgb = self.rgb();
        while contrast_with_white(rgb) < READABLE_CONTRAST {
            rgb = mix(rgb, [0, 0, 0], 0.1);
        }
        rgb
    }
}

/// Least contrast of small text with its ground (WCAG 2.1, success criterion 1.4.3).
const READABLE_CONTRAST: f64 = 4.5;

/// A mixture of two colours.
#[expect(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    reason = "a mean of two bytes, rounded, is a byte"
)]
fn mix(from: Rgb, to: Rgb, share: f64) -> Rgb {
    std::array::from_fn(|channel| {
        let (a, b) = (f64::from(from[channel]), f64::from(to[channel]));
        (a + (b - a) * share).round().clamp(0.0, 255.0) as u8
    })
}

/// Linear intensity of an sRGB channel (IEC 61966-2-1).
fn linear(channel: u8) -> f64 {
    let c = f64::from(channel) / 255.0;
    if c <= 0.04045 {
        c / 12.92
    } else {
        ((c + 0.055) / 1.055).powf(2.4)
    }
}

/// Relative luminance of an sRGB colour.
fn luminance(rgb: Rgb) -> f64 {
    0.2126 * linear(rgb[0]) + 0.7152 * linear(rgb[1]) + 0.0722 * linear(rgb[2])
}

fn contrast_with_white(rgb: Rgb) -> f64 {
    1.05 / (luminance(rgb) + 0.05)
}

/// How a line is broken.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Dash {
    /// Unbroken.
    #[default]
    Solid,
    /// Even dashes.
    Dashed,
    /// Dots.
    Dotted,
    /// A dash, a dot.
    DashDot,
    /// Long dashes.
    Long,
}

impl Dash {
    /// The dash of the curve with this number, so that neighbours differ by more than their ink.
    #[must_use]
    pub fn of(index: usize) -> Self {
        [
            Self::Solid,
            Self::Dashed,
            Self::DashDot,
            Self::Long,
            Self::Dotted,
        ][index % 5]
    }

    /// Lengths of marks and gaps in px for a line of this width; none if unbroken.
    pub(crate) fn lengths_px(self, width_px: f64) -> Vec<f64> {
        let unit_px = width_px.max(1.0);
        let lengths: &[f64] = match self {
            Self::Solid => &[],
            Self::Dashed => &[4.0, 2.5],
            Self::Dotted => &[1.2, 2.2],
            Self::DashDot => &[6.0, 2.2, 1.2, 2.2],
            Self::Long => &[9.0, 3.0],
        };
        lengths.iter().map(|length| length * unit_px).collect()
    }
}

/// Shape of the marks at the points of a curve.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mark {
    /// A filled disc.
    Disc,
    /// An open ring.
    Ring,
    /// A filled square.
    Square,
    /// A filled square on its corner.
    Diamond,
    /// A filled triangle.
    Triangle,
}

#[cfg(test)]
mod tests {
    use super::*;

    /// CIE L*a*b* of linear sRGB, white D65.
    fn lab(rgb: [f64; 3]) -> [f64; 3] {
        let [r, g, b] = rgb;
        let f = |t: f64| {
            if t > 0.008856 {
                t.cbrt()
            } else {
                7.787 * t + 16.0 / 116.0
            }
        };
        let x = f((0.4124 * r + 0.3576 * g + 0.1805 * b).max(0.0) / 0.9505);
        let y = f((0.2126 * r + 0.7152 * g + 0.0722 * b).max(0.0));
        let z = f((0.0193 * r + 0.1192 * g + 0.9505 * b).max(0.0) / 1.089);
        [116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)]
    }

    fn linear_rgb(rgb: Rgb) -> [f64; 3] {
        rgb.map(linear)
    }

    /// How a colour looks without long, middle or short cones: projection in cone space by
    /// F. Viénot, H. Brettel, J. D. Mollon, Color Res. Appl. 24, 243 (1999); its numbers, and those
    /// of the rarer third case, from memory.
    fn seen_without(cone: usize, rgb: [f64; 3]) -> [f64; 3] {
        let to_cones = nalgebra::Matrix3::new(
            17.8824, 43.5161, 4.11935, 3.45565, 27.1554, 3.86714, 0.0299566, 0.184309, 1.46709,
        );
        let mut cones = to_cones * nalgebra::Vector3::from(rgb);
        cones[cone] = match cone {
            0 => 2.02344 * cones[1] - 2.52581 * cones[2],
            1 => 0.494207 * cones[0] + 1.24827 * cones[2],
            _ => -0.395913 * cones[0] + 0.801109 * cones[1],
        };
        (to_cones.try_inverse().expect("cones differ") * cones).into()
    }

    fn distance(a: [f64; 3], b: [f64; 3]) -> f64 {
        (0..3).map(|i| (a[i] - b[i]).powi(2)).sum::<f64>().sqrt()
    }

    /// A difference of 20 in L*a*b* is seen at a glance even on thin lines (common practice).
    #[test]
    fn colours_differ_for_every_kind_of_sight() {
        for (i, a) in COLOURS.iter().enumerate() {
            for b in &COLOURS[..i] {
                let (a, b) = (linear_rgb(*a), linear_rgb(*b));
                assert!(distance(lab(a), lab(b)) > 20.0);
                for cone in 0..3 {
                    let seen = distance(lab(seen_without(cone, a)), lab(seen_without(cone, b)));
                    assert!(seen > 20.0, "{a:?} {b:?} without cone {cone}: {seen}");
                }
            }
        }
    }

    #[test]
    fn colours_differ_in_grey_too_and_stand_out_from_the_page() {
        let mut lightness: Vec<f64> = COLOURS.iter().map(|c| lab(linear_rgb(*c))[0]).collect();
        lightness.sort_by(f64::total_cmp);
        assert!(
            lightness.windows(2).all(|pair| pair[1] - pair[0] > 5.0),
            "{lightness:?}"
        );
        assert!(
            COLOURS
                .iter()
                .all(|colour| contrast_with_white(*colour) > 2.2)
        );
    }

    #[test]
    fn the_ramp_rises_in_lightness() {
        for of in [2, 3, 5, 12] {
            let ramp: Vec<f64> = (0..of)
                .map(|step| luminance(Ink::Ramp { step, of }.rgb()))
                .collect();
            assert!(ramp.windows(2).all(|pair| pair[0] < pair[1]), "{ramp:?}");
        }
        assert_eq!(Ink::Ramp { step: 0, of: 0 }.rgb(), RAMP[0]);
        assert_eq!(Ink::Ramp { step: 9, of: 4 }.rgb(), RAMP[3]);
    }

    #[test]
    fn text_is_readable_in_every_ink() {
        let inks = (0..8).map(Ink::Colour).chain([Ink::Black, Ink::Grey]);
        for ink in inks.chain((0..6).map(|step| Ink::Ramp { step, of: 6 })) {
            assert!(
                contrast_with_white(ink.text_rgb()) >= READABLE_CONTRAST,
                "{ink:?}"
            );
        }
    }
}
