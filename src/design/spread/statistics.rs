//! Mean, quantiles, bars and yield of wafers.

use crate::design::draws::normal_below;

/// Mean and sigma of a wavelength, nm in vacuum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Moments {
    /// Mean.
    pub mean_nm: f64,
    /// Standard deviation.
    pub sigma_nm: f64,
}

/// The share of good wafers, by several roads.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Yield {
    /// The window, nm in vacuum.
    pub target_nm: f64,
    /// Its half width, nm.
    pub tolerance_nm: f64,
    /// Of the wafers drawn.
    pub sampled: f64,
    /// Standard error of that share, from the number of draws.
    pub standard_error: f64,
    /// By the linear law.
    pub linear: f64,
    /// Of the wafers drawn, if the design's median stood on the target.
    pub centred: f64,
    /// Of the wafers drawn, with the error of the model unknown as it is.
    pub with_model: f64,
}

/// Bars of equal width.
#[derive(Clone, Debug, PartialEq)]
pub struct Histogram {
    /// Where the first bar begins, nm.
    pub from_nm: f64,
    /// Width of a bar, nm.
    pub width_nm: f64,
    /// Wafers in each.
    pub counts: Vec<usize>,
}

pub(super) fn moments(values: &[f64]) -> Moments {
    let count = values.len() as f64;
    let mean_nm = values.iter().sum::<f64>() / count;
    let squares: f64 = values.iter().map(|nm| (nm - mean_nm).powi(2)).sum();
    Moments {
        mean_nm,
        sigma_nm: (squares / (count - 1.0).max(1.0)).sqrt(),
    }
}

/// The value below which a share of sorted values lies, straight between neighbours.
pub(super) fn quantile(sorted: &[f64], share: f64) -> f64 {
    let place = share * (sorted.len() - 1) as f64;
    let below = place.floor() as usize;
    let above = (below + 1).min(sorted.len() - 1);
    sorted[below] + (sorted[above] - sorted[below]) * (place - below as f64)
}

pub(super) fn shares(
    sorted: &[f64],
    lost: usize,
    (target_nm, tolerance_nm): (f64, f64),
    linear: Moments,
    model_nm: f64,
) -> Yield {
    let count = (sorted.len() + lost) as f64;
    let within = |shift_nm: f64| {
        let inside = sorted
            .iter()
            .filter(|nm| (*nm + shift_nm - target_nm).abs() <= tolerance_nm);
        inside.count() as f64 / count
    };
    let normal = |mean_nm: f64, sigma_nm: f64| {
        let bound =
            |side: f64| normal_below((target_nm + side * tolerance_nm - mean_nm) / sigma_nm);
        bound(1.0) - bound(-1.0)
    };
    let sampled = within(0.0);
    let with_model = if model_nm > 0.0 {
        sorted.iter().map(|nm| normal(*nm, model_nm)).sum::<f64>() / count
    } else {
        sampled
    };
    Yield {
        target_nm,
        tolerance_nm,
        sampled,
        standard_error: (sampled * (1.0 - sampled) / count).sqrt(),
        linear: if linear.sigma_nm > 0.0 {
            normal(linear.mean_nm, linear.sigma_nm)
        } else {
            f64::from((linear.mean_nm - target_nm).abs() <= tolerance_nm)
        },
        centred: within(target_nm - quantile(sorted, 0.5)),
        with_model,
    }
}

/// Bars over all wafers but the outermost thousandth at either end, which join the end bars.
pub(super) fn histogram(sorted: &[f64]) -> Histogram {
    const BARS: usize = 48;
    let (low, high) = (quantile(sorted, 0.0005), quantile(sorted, 0.9995));
    let width_nm = ((high - low) / BARS as f64).max(1e-6);
    let mut counts = vec![0; BARS];
    for nm in sorted {
        let bar = ((nm - low) / width_nm).max(0.0) as usize;
        counts[bar.min(BARS - 1)] += 1;
    }
    Histogram {
        from_nm: low,
        width_nm,
        counts,
    }
}
