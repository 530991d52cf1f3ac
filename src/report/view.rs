//! What several formats pick out of an [`Outcome`]: which networks to show under which file
//! name, and the worst values among what is already there. Nothing is computed anew.

use crate::explore::{LimitPrice, NetworkReport, Outcome, OutputReport, Prices, Verdict};

/// A network to show, with the stem of its files.
#[derive(Debug, Clone, Copy)]
pub struct Shown<'a> {
    /// The network.
    pub network: &'a NetworkReport,
    /// False for the nearest network when nothing fits.
    pub fits: bool,
    /// Digits its number takes in file names.
    digits: usize,
}

impl Shown<'_> {
    /// Stem of its files: `network-01`, or `nearest`.
    pub fn stem(&self) -> String {
        if self.fits {
            format!("network-{:0width$}", self.network.rank, width = self.digits)
        } else {
            "nearest".to_owned()
        }
    }
    /// "network 1", or "nearest network".
    pub fn title(&self) -> String {
        if self.fits {
            format!("network {}", self.network.rank)
        } else {
            "nearest network".to_owned()
        }
    }
    /// The rank as text: its number, or "nearest".
    pub fn rank(&self) -> String {
        if self.fits {
            self.network.rank.to_string()
        } else {
            "-".to_owned()
        }
    }
}

/// The front in rank order; where it is empty, the nearest network if there is one.
pub fn networks(outcome: &Outcome) -> Vec<Shown<'_>> {
    let most = outcome
        .front
        .iter()
        .map(|network| network.rank)
        .max()
        .unwrap_or(0);
    let digits = most.to_string().len().max(2);
    if outcome.front.is_empty() {
        let nearest = outcome.nearest.as_deref();
        nearest
            .map(|network| Shown {
                network,
                fits: false,
                digits,
            })
            .into_iter()
            .collect()
    } else {
        outcome
            .front
            .iter()
            .map(|network| Shown {
                network,
                fits: true,
                digits,
            })
            .collect()
    }
}

/// Names and units of all figures that the networks carry, in the order of first sight.
pub fn figure_names<'a>(networks: &[Shown<'a>]) -> Vec<(&'a str, &'a str)> {
    let mut names: Vec<(&str, &str)> = Vec::new();
    for shown in networks {
        for figure in &shown.network.figures {
            if names.iter().all(|(name, _)| *name != figure.name) {
                names.push((&figure.name, &figure.unit));
            }
        }
    }
    names
}

/// The output with the largest current error (the first of equals).
pub fn worst_error(network: &NetworkReport) -> Option<&OutputReport> {
    network.outputs.iter().reduce(|worst, output| {
        if output.error.total_cmp(&worst.error).is_gt() {
            output
        } else {
            worst
        }
    })
}

/// The output with the least headroom margin (the first of equals).
pub fn worst_headroom(network: &NetworkReport) -> Option<&OutputReport> {
    network.outputs.iter().reduce(|worst, output| {
        if output
            .headroom_margin
            .total_cmp(&worst.headroom_margin)
            .is_lt()
        {
            output
        } else {
            worst
        }
    })
}

/// The limits of which a step costs something, dearest first: what nothing was found for, then by
/// the change of area.
pub fn dear(prices: &Prices) -> Vec<&LimitPrice> {
    let mut dear: Vec<&LimitPrice> = prices
        .limits
        .iter()
        .filter(|price| !price.slack(prices.noise) && price.tighter.verdict != Verdict::NotAllowed)
        .collect();
    dear.sort_by(|a, b| b.cost().total_cmp(&a.cost()));
    dear
}

/// The limits of which a step costs nothing, in the order of the spec.
pub fn slack(prices: &Prices) -> Vec<&LimitPrice> {
    let slack = |price: &&LimitPrice| price.slack(prices.noise);
    prices.limits.iter().filter(slack).collect()
}

/// The two figures the front is drawn over: the first two of the trade; a lone one is joined by
/// the overhead current, or by the area where it is the overhead current itself.
pub fn axes(outcome: &Outcome) -> [String; 2] {
    let first = outcome.spec.trade.first().map_or("area", String::as_str);
    let fallback = if first == "overhead_current" {
        "area"
    } else {
        "overhead_current"
    };
    let second = outcome.spec.trade.get(1).map_or(fallback, String::as_str);
    [first.to_owned(), second.to_owned()]
}
