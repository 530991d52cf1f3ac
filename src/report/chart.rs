//! The front as a still picture: axes, ticks, limits, the steps between networks, the networks.
//!
//! Drawn for a given width, so that its letters keep their size; colours come from classes.

use super::{format, view, words};
use crate::explore::Outcome;
use maud::{Markup, html};

/// Styles of the classes used, for both colour schemes; custom properties carry the colours.
pub const STYLE: &str = "\
.chart{font:12px ui-sans-serif,system-ui,'Segoe UI','Noto Sans','DejaVu Sans',sans-serif;font-variant-numeric:tabular-nums}\
.chart text{fill:var(--muted)}.chart .name{fill:var(--ink)}\
.chart .grid{stroke:var(--line);stroke-width:1;fill:none;shape-rendering:crispEdges}\
.chart .axis{stroke:var(--muted);stroke-width:1;fill:none;shape-rendering:crispEdges}\
.chart .steps{stroke:var(--sink);stroke-width:1.25;fill:none;opacity:.5}\
.chart .limit{stroke:var(--bad);stroke-width:1;stroke-dasharray:5 3;fill:none}\
.chart .limit-name{fill:var(--bad)}\
.chart .point .dot{fill:var(--sheet);stroke:var(--sink);stroke-width:2}\
.chart .point.chosen .dot{fill:var(--sink)}\
.chart .point text{fill:var(--ink)}";

/// Colours on light and dark paper, as custom properties.
pub const COLOURS: &str = "\
:root{--paper:#f6f5f0;--sheet:#fefdfa;--ink:#1d282e;--muted:#5f6b72;--line:#dcdad1;--sink:#0b6a76;--source:#a24a12;--bad:#a61f2b;--shade:#eceadf;--band:#0b6a7626;--band-source:#a24a1226}\
@media (prefers-color-scheme:dark){:root{--paper:#0f1519;--sheet:#151d22;--ink:#dfe7ea;--muted:#93a1a9;--line:#2a363d;--sink:#56bfcd;--source:#e59a5e;--bad:#f0747c;--shade:#202b31;--band:#56bfcd33;--band-source:#e59a5e33}}";

/// A linear axis with round ticks.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// Lower end, in the unit drawn.
    pub least: f64,
    /// Upper end, in the unit drawn.
    pub most: f64,
    /// Distance of the ticks.
    pub step: f64,
    /// From SI to the unit drawn.
    pub scale: f64,
    /// Unit drawn.
    pub unit: String,
}

impl Axis {
    /// An axis around SI `values` with about `count` ticks; ends lie on ticks. Values that are not
    /// finite are left out; without any, the axis runs from 0 to 1.
    pub fn around(values: impl Iterator<Item = f64> + Clone, unit: &str, count: usize) -> Axis {
        let finite = values.filter(|value| value.is_finite());
        let least = finite.clone().fold(f64::INFINITY, f64::min);
        let most = finite.fold(f64::NEG_INFINITY, f64::max);
        let (scale, unit) = drawn_unit(most.abs().max(least.abs()), unit);
        let (mut least, mut most) = if least > most {
            (0.0, 1.0)
        } else {
            (least * scale, most * scale)
        };
        // Some air, and a span of at least two per cent of the value where all values agree.
        let span = (most - least)
            .max(0.02 * most.abs().max(least.abs()))
            .max(1e-9);
        let middle = 0.5 * (least + most);
        let floor_at_zero = least >= 0.0;
        (least, most) = (middle - 0.56 * span, middle + 0.56 * span);
        if floor_at_zero {
            least = least.max(0.0);
        }
        let step = round_step((most - least) / count.max(1) as f64);
        let least = (least / step).floor() * step;
        let most = (most / step).ceil() * step;
        Axis {
            least,
            most,
            step,
            scale,
            unit,
        }
    }

    /// The ticks, rising, with their labels.
    pub fn ticks(&self) -> Vec<(f64, String)> {
        let number = ((self.most - self.least) / self.step).round() as i64;
        let decimals = (-self.step.log10().floor()).max(0.0) as usize;
        // A step of 2.5 needs one more decimal than its power of ten tells.
        let odd = (self.step * 10f64.powi(decimals as i32)).fract() > 1e-6;
        let decimals = decimals + usize::from(odd);
        (0..=number)
            .map(|index| {
                let value = self.least + index as f64 * self.step;
                let text = if decimals == 0 && value.abs() >= 1e3 {
                    format::area_number(value * 1e-12)
                } else {
                    format!("{value:.decimals$}")
                };
                (value, format::typeset(&text))
            })
            .collect()
    }

    /// Place of an SI value between 0 (lower end) and 1 (upper end).
    pub fn place(&self, value: f64) -> f64 {
        (value * self.scale - self.least) / (self.most - self.least)
    }
}

/// The next of 1, 2, 2.5, 5 times a power of ten, at or above `raw`.
fn round_step(raw: f64) -> f64 {
    let power = 10f64.powf(raw.log10().floor());
    let mantissa = raw / power;
    let round = [1.0, 2.0, 2.5, 5.0]
        .into_iter()
        .find(|&round| mantissa <= round * (1.0 + 1e-9));
    round.unwrap_or(10.0) * power
}

/// Scale and unit in which SI values up to `largest` are drawn.
fn drawn_unit(largest: f64, unit: &str) -> (f64, String) {
    match unit {
        "m2" => (1e12, "um2".to_owned()),
        "1" => (1e2, "%".to_owned()),
        "V" => (1.0, "V".to_owned()),
        _ => {
            let prefixes = [
                (1e9, "G"),
                (1e6, "M"),
                (1e3, "k"),
                (1.0, ""),
                (1e-3, "m"),
                (1e-6, "u"),
                (1e-9, "n"),
            ];
            let found = prefixes.into_iter().find(|&(size, _)| largest >= size);
            let (size, prefix) = found.unwrap_or((1e-12, "p"));
            (1.0 / size, format!("{prefix}{unit}"))
        }
    }
}

/// One decimal: enough for a screen, and the same bytes everywhere.
fn px(value: f64) -> String {
    format!("{value:.1}")
}

/// The front over its two trade figures, `width` by `height` pixels, one network `chosen`.
/// Without networks, a sentence in place of the chart.
pub fn front(outcome: &Outcome, width: f64, height: f64, chosen: Option<usize>) -> Markup {
    let networks = view::networks(outcome);
    let [across, up] = view::axes(outcome);
    let value = |shown: &view::Shown<'_>, name: &str| {
        shown
            .network
            .figure(name)
            .map_or(f64::NAN, |figure| figure.value)
    };
    let unit = |name: &str| {
        let mut figures = networks
            .iter()
            .filter_map(|shown| shown.network.figure(name));
        figures
            .next()
            .map_or(String::new(), |figure| figure.unit.clone())
    };
    let limit = |name: &str| match name {
        "area" => outcome.spec.limits.area.map(|limit| limit.0),
        "overhead_current" => outcome.spec.limits.overhead_current.map(|limit| limit.0),
        "power" => outcome.spec.limits.power.map(|limit| limit.0),
        _ => None,
    };
    let axis = |name: &str, count: usize| {
        let values = networks.iter().map(|shown| value(shown, name));
        Axis::around(values, &unit(name), count)
    };
    let x_axis = axis(&across, (width / 110.0) as usize);
    let y_axis = axis(&up, (height / 60.0) as usize);
    let (left, right, top, bottom) = (52.0, width - 24.0, 30.0, height - 40.0);
    let x = |place: f64| left + place * (right - left);
    let y = |place: f64| bottom - place * (bottom - top);
    let mut points: Vec<(usize, &view::Shown<'_>, f64, f64)> = Vec::new();
    for (index, shown) in networks.iter().enumerate() {
        let at = (
            x(x_axis.place(value(shown, &across))),
            y(y_axis.place(value(shown, &up))),
        );
        if at.0.is_finite() && at.1.is_finite() {
            points.push((index, shown, at.0, at.1));
        }
    }
    let mut order: Vec<(f64, f64)> = points.iter().map(|&(_, _, x, y)| (x, y)).collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0).then(b.1.total_cmp(&a.1)));
    let mut steps = String::new();
    for (index, (x, y)) in order.iter().enumerate() {
        if index == 0 {
            steps.push_str(&format!("M{} {}", px(*x), px(*y)));
        } else {
            steps.push_str(&format!("H{}V{}", px(*x), px(*y)));
        }
    }
    let name = |name: &str, axis: &Axis| {
        format!(
            "{}, {}",
            words::label(name),
            format::printed_unit(&axis.unit)
        )
    };
    let inside = |place: &f64| (0.0..=1.0).contains(place);
    html! {
        svg.chart xmlns="http://www.w3.org/2000/svg" viewBox={"0 0 " (width) " " (height)}
            width=(width) height=(height) role="img"
            aria-label={"The front: " (words::label(&up)) " against " (words::label(&across))} {
            @for (tick, text) in x_axis.ticks() {
                @let at = x((tick - x_axis.least) / (x_axis.most - x_axis.least));
                path.grid d={"M" (px(at)) " " (px(top)) "V" (px(bottom))} {}
                text x=(px(at)) y=(px(bottom + 16.0)) text-anchor="middle" { (text) }
            }
            @for (tick, text) in y_axis.ticks() {
                @let at = y((tick - y_axis.least) / (y_axis.most - y_axis.least));
                path.grid d={"M" (px(left)) " " (px(at)) "H" (px(right))} {}
                text x=(px(left - 7.0)) y=(px(at + 4.0)) text-anchor="end" { (text) }
            }
            path.axis d={"M" (px(left)) " " (px(top)) "V" (px(bottom)) "H" (px(right))} {}
            text.name x=(px(right)) y=(px(height - 6.0)) text-anchor="end" { (name(&across, &x_axis)) }
            text.name x="4" y="14" { (name(&up, &y_axis)) }
            @if let Some(place) = limit(&across).map(|limit| x_axis.place(limit)).filter(inside) {
                path.limit d={"M" (px(x(place))) " " (px(top)) "V" (px(bottom))} {}
                text.limit-name x=(px(x(place) - 5.0)) y=(px(top + 12.0)) text-anchor="end" { "limit" }
            }
            @if let Some(place) = limit(&up).map(|limit| y_axis.place(limit)).filter(inside) {
                path.limit d={"M" (px(left)) " " (px(y(place))) "H" (px(right))} {}
                text.limit-name x=(px(right - 5.0)) y=(px(y(place) - 5.0)) text-anchor="end" { "limit" }
            }
            @if points.len() > 1 && outcome.spec.trade.len() <= 2 {
                path.steps d=(steps) {}
            }
            @for (index, shown, x, y) in &points {
                g.point.chosen[chosen == Some(*index)] {
                    circle.dot cx=(px(*x)) cy=(px(*y)) r="5" {}
                    text x=(px(x + 8.0)) y=(px(y - 7.0)) { (shown.rank()) }
                    title { (shown.title()) }
                }
            }
            @if points.is_empty() {
                text x=(px(0.5 * (left + right))) y=(px(0.5 * (top + bottom))) text-anchor="middle" {
                    "no network to show"
                }
            }
        }
    }
}
