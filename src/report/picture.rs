//! `front.svg`: the front as a picture of its own, for a README or a review.

use super::{Files, Format, chart, words};
use crate::explore::Outcome;
use maud::{PreEscaped, html};

/// The format.
pub const FORMAT: Format = Format {
    name: "picture",
    files: &["front.svg"],
    about: "the front as a picture of its own",
    render,
};

fn render(outcome: &Outcome) -> Files {
    let (width, height) = (720.0, 420.0);
    let drawing = chart::front(outcome, width, height, None);
    let lines = words::wrap(&outcome.spec.title, 80);
    let mut title: String = lines
        .first()
        .map_or("", String::as_str)
        .chars()
        .take(80)
        .collect();
    if title != outcome.spec.title {
        title.push('\u{2026}');
    }
    // The chart is a complete drawing; the picture adds its paper and its colours.
    let picture = html! {
        svg xmlns="http://www.w3.org/2000/svg" viewBox={"0 0 " (width + 32.0) " " (height + 62.0)}
            width=(width + 32.0) height=(height + 62.0) {
            style { (PreEscaped(format!("{}{}.paper{{fill:var(--sheet)}}.title{{font-size:15px;font-weight:600}}", chart::COLOURS, chart::STYLE))) }
            rect.paper width="100%" height="100%" {}
            g.chart { text.name.title x="20" y="30" { (title) } }
            svg x="16" y="46" width=(width) height=(height) { (drawing) }
        }
    };
    let text = format!(
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n{}\n",
        picture.into_string()
    );
    vec![("front.svg".into(), text.into_bytes())]
}
