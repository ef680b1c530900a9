//! The parts of the light: what becomes current, what each layer takes, what leaves.

use crate::report::context::{Context, Row, Style};
use crate::report::figure::hatch::Hatch;
use crate::report::palette::style_number;
use crate::report::text::visible;

/// One part of the light.
#[derive(Clone, Debug)]
pub struct Band {
    /// What it is, for the table.
    pub name: String,
    /// The same in fewer words, for labels.
    pub short: String,
    /// How it is drawn.
    pub style: Style,
    /// The junction whose current it is, where it is current.
    pub junction: Option<usize>,
    /// Share of the photons at each wavelength, 0..1.
    pub(super) share: Vec<f64>,
    /// Over the part of the spectrum that is drawn, mA/cm2.
    pub drawn_ma: f64,
    /// Over the whole spectrum, mA/cm2.
    pub whole_ma: f64,
}

/// All parts of the light under the first condition, from the bottom of the figure to its top.
#[derive(Clone, Debug)]
pub struct Light {
    /// Parts; at each wavelength their shares add up to 1.
    pub bands: Vec<Band>,
    /// nm.
    pub(super) wavelength_nm: Vec<f64>,
    /// Photon current counted from the blue end, mA/cm2.
    pub(super) counted_ma: Vec<f64>,
    /// First wavelength, last drawn, last at all, nm.
    pub range_nm: (f64, f64, f64),
    /// Photon current of the drawn part and of all, mA/cm2: the extent of the axis.
    pub total_ma: (f64, f64),
    /// The sums of the parts as they are printed, which take each junction's current from the
    /// evaluation's own finer grid.
    pub sums_ma: (f64, f64),
    /// Index of the last wavelength drawn.
    cut: usize,
}

/// Layers by themselves at most; the others together.
const LAYERS_SHOWN: usize = 3;

impl Light {
    /// Divides the light; `None` where the condition has no spectral data.
    pub fn of(context: &Context<'_>) -> Option<Self> {
        let spectral = &context.drawn.spectral;
        let n = spectral
            .wavelength_nm
            .len()
            .min(spectral.photon_current_ma_per_cm2_per_nm.len())
            .min(spectral.reflectance.len());
        if n < 3 {
            return None;
        }
        let wavelength_nm = spectral.wavelength_nm[..n].to_vec();
        let density = &spectral.photon_current_ma_per_cm2_per_nm[..n];
        let mut counted_ma = vec![0.0; n];
        for i in 1..n {
            counted_ma[i] = counted_ma[i - 1]
                + (wavelength_nm[i] - wavelength_nm[i - 1]) * (density[i] + density[i - 1]) / 2.0;
        }
        let all = counted_ma[n - 1];
        let sum_at = |i: usize| -> f64 { spectral.eqe.values().filter_map(|eqe| eqe.get(i)).sum() };
        // A faint tail, as of held end values, must not stretch the figure over the far infrared.
        let last_absorbed = (0..n).rev().find(|&i| sum_at(i) > 0.025).unwrap_or(n - 1);
        let room = counted_ma[last_absorbed] * 0.05;
        let cut =
            (last_absorbed..n).find(|&i| counted_ma[i] >= counted_ma[last_absorbed] + room).unwrap_or(n - 1);
        if counted_ma[cut] <= 0.0 {
            return None;
        }
        let mut light = Self {
            bands: Vec::new(),
            range_nm: (wavelength_nm[0], wavelength_nm[cut], wavelength_nm[n - 1]),
            total_ma: (counted_ma[cut], all),
            sums_ma: (0.0, 0.0),
            cut,
            wavelength_nm,
            counted_ma,
        };
        light.divide(context, n);
        light.sums_ma =
            light.bands.iter().fold((0.0, 0.0), |sum, b| (sum.0 + b.drawn_ma, sum.1 + b.whole_ma));
        Some(light)
    }

    fn divide(&mut self, context: &Context<'_>, n: usize) {
        let spectral = &context.drawn.spectral;
        let open = 1.0 - context.shading();
        let rows: Vec<Row<'_>> = context.layers().collect();
        let zero = vec![0.0; n];
        let share_of = |row: &Row<'_>| -> &[f64] {
            spectral.absorptance.get(&row.result.name).filter(|a| a.len() >= n).map_or(&zero, |a| a)
        };
        let mut absorbed = vec![0.0; n];
        let mut not_collected = vec![0.0; n];
        for (index, junction) in context.drawn.junctions.iter().enumerate() {
            let eqe = spectral.eqe.get(&junction.name).filter(|eqe| eqe.len() >= n).map_or(&zero, |e| e);
            let mut taken = vec![0.0; n];
            for row in rows.iter().filter(|row| row.junction() == Some(index) && row.makes_current()) {
                for (sum, share) in taken.iter_mut().zip(share_of(row)) {
                    *sum += share;
                }
            }
            for (sum, quantum) in taken.iter_mut().zip(eqe) {
                *sum = sum.max(*quantum);
            }
            for i in 0..n {
                absorbed[i] += taken[i];
                not_collected[i] += (taken[i] - eqe[i]) * open;
            }
            let name = visible(&junction.name);
            self.push_current(
                junction.photocurrent_ma_per_cm2,
                Band {
                    name: format!("{name}, as current"),
                    short: name,
                    style: Style { class: format!("f{}", style_number(index)), hatch: None, key: None },
                    junction: Some(index),
                    share: (0..n).map(|i| eqe[i] * open).collect(),
                    drawn_ma: 0.0,
                    whole_ma: 0.0,
                },
            );
        }
        let lost = |name: &str, short: &str, style: Style, share: Vec<f64>| Band {
            name: name.into(),
            short: short.into(),
            style,
            junction: None,
            share,
            drawn_ma: 0.0,
            whole_ma: 0.0,
        };
        let plus = Style::hatched(Hatch::Plus(8.0), "");
        self.push(lost("absorbed, not collected", "not collected", plus, not_collected));
        self.layers(context, &rows, &share_of, &mut absorbed);
        let reflected: Vec<f64> = (0..n).map(|i| spectral.reflectance[i] * open).collect();
        let passing: Vec<f64> = (0..n).map(|i| (open - absorbed[i] * open - reflected[i]).max(0.0)).collect();
        let through = Style { class: "thru".into(), hatch: None, key: None };
        self.push(lost("passing through", "passing through", through, passing));
        let zigzag = Style::hatched(Hatch::Zigzag(5.0), "");
        self.push(lost("reflected", "reflected", zigzag, reflected));
        if open < 1.0 {
            let metal = Style { class: "fm".into(), hatch: None, key: None };
            self.push(lost("under the fingers", "fingers", metal, vec![1.0 - open; n]));
        }
    }

    /// The largest layers that make no current by themselves, the others as one.
    fn layers<'r>(
        &mut self,
        context: &Context<'_>,
        rows: &'r [Row<'r>],
        share_of: &dyn Fn(&Row<'_>) -> &'r [f64],
        absorbed: &mut [f64],
    ) {
        let n = absorbed.len();
        let open = 1.0 - context.shading();
        let mut parts: Vec<(usize, Band)> = Vec::new();
        for row in rows.iter().filter(|row| !row.makes_current()) {
            let share = share_of(row);
            if share.iter().all(|s| *s <= 0.0) {
                continue;
            }
            for i in 0..n {
                absorbed[i] += share[i];
            }
            let name = layer_words(context, row);
            let band = Band {
                short: name.clone(),
                name,
                style: row.style(),
                junction: None,
                share: share.iter().take(n).map(|s| s * open).collect(),
                drawn_ma: 0.0,
                whole_ma: 0.0,
            };
            parts.push((row.index, self.measured(band)));
        }
        parts.sort_by(|a, b| b.1.drawn_ma.total_cmp(&a.1.drawn_ma).then(a.0.cmp(&b.0)));
        let small = self.total_ma.0 * 0.002;
        let shown = parts.iter().take(LAYERS_SHOWN).filter(|(_, band)| band.drawn_ma > small).count();
        let rest = parts.split_off(shown.min(parts.len()));
        parts.sort_by_key(|(index, _)| *index);
        self.bands.extend(parts.into_iter().map(|(_, band)| band));
        if let Some(((_, first), others)) = rest.split_first() {
            if others.is_empty() {
                self.bands.push(first.clone());
                return;
            }
            let mut together = first.clone();
            together.name = if shown == 0 {
                format!("{} layers that make no current", rest.len())
            } else {
                format!("{} other layers", rest.len())
            };
            together.short = if shown == 0 { "layers".into() } else { "other layers".into() };
            together.style = Style::hatched(Hatch::Lines(-45.0, 5.0), "");
            for (_, other) in others {
                for (sum, more) in together.share.iter_mut().zip(&other.share) {
                    *sum += more;
                }
            }
            let together = self.measured(together);
            self.bands.push(together);
        }
    }

    /// A junction's current is known better than the sheet's grid can add it up.
    fn push_current(&mut self, known_ma: f64, band: Band) {
        let mut band = self.measured(band);
        if band.whole_ma > 0.0 && (known_ma / band.whole_ma - 1.0).abs() < 0.02 {
            band.drawn_ma *= known_ma / band.whole_ma;
            band.whole_ma = known_ma;
        }
        self.bands.push(band);
    }

    fn push(&mut self, band: Band) {
        let band = self.measured(band);
        // What is nothing anywhere has no line in the table either.
        if band.whole_ma > self.total_ma.1 * 1e-5 {
            self.bands.push(band);
        }
    }

    fn measured(&self, mut band: Band) -> Band {
        let counted = &self.counted_ma;
        let part = |i: usize| (counted[i] - counted[i - 1]) * (band.share[i] + band.share[i - 1]) / 2.0;
        let drawn: f64 = (1..=self.cut).map(part).sum();
        let rest: f64 = (self.cut + 1..counted.len()).map(part).sum();
        band.drawn_ma = drawn;
        band.whole_ma = drawn + rest;
        band
    }
}

/// `AlInP window of top`, `wafer`
pub fn layer_words(context: &Context<'_>, row: &Row<'_>) -> String {
    let duty = row.duty(context.design);
    match row.junction().and_then(|index| context.drawn.junctions.get(index)) {
        Some(junction) => format!("{duty} of {}", visible(&junction.name)),
        None if row.result.name.contains('.') || duty == "tunnel" => {
            format!("{duty} {}", visible(row.material()))
        }
        None if matches!(duty, "coat" | "contact" | "layer" | "buffer") => {
            format!("{} {duty}", visible(row.material()))
        }
        None => duty.to_string(),
    }
}
