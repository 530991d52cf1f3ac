//! Numbers the way designers read them: three significant digits, SI prefixes, areas in um2.
//!
//! Everything is plain ASCII ("10.0 uA", "2.50 MOhm", "-40 degC"), fit for terminals, decks and
//! tables; [`typeset`] turns such text into its printed form for pages and pictures.

/// SI prefixes with their powers of ten, rising.
const PREFIXES: [(&str, i32); 10] = [
    ("a", -18),
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("u", -6),
    ("m", -3),
    ("", 0),
    ("k", 3),
    ("M", 6),
    ("G", 9),
];

/// Text for a value that is no finite number, `None` for one that is.
fn not_finite(value: f64) -> Option<&'static str> {
    if value.is_nan() {
        Some("undefined")
    } else if value == f64::INFINITY {
        Some("unbounded")
    } else if value == f64::NEG_INFINITY {
        Some("-unbounded")
    } else {
        None
    }
}

/// Decimal exponent of `value` after rounding to `digits` significant digits; 0 for zero.
fn exponent(value: f64, digits: usize) -> i32 {
    if value == 0.0 {
        return 0;
    }
    // The `e` form rounds first, so 999.96 at three digits has exponent 3. Its exponent is a
    // plain integer by construction.
    let text = format!("{value:.*e}", digits - 1);
    text.rsplit('e')
        .next()
        .and_then(|digits| digits.parse().ok())
        .unwrap_or(0)
}

/// `value` with at most `decimals` decimals, trailing zeros cut, and no negative zero.
fn trimmed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    let text = if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.')
    } else {
        &text
    };
    if text == "-0" {
        "0".to_owned()
    } else {
        text.to_owned()
    }
}

/// Engineering notation with three significant digits: `10.0 uA`, `2.50 MOhm`, `0 A`.
///
/// `unit` may be empty or "1" for a bare number. Values past the prefixes keep the outermost one.
pub fn engineering(value: f64, unit: &str) -> String {
    let unit = if unit == "1" { "" } else { unit };
    if let Some(text) = not_finite(value) {
        return text.to_owned();
    }
    if value == 0.0 {
        return format!("0 {unit}").trim_end().to_owned();
    }
    let power = exponent(value, 3);
    let (prefix, step) = PREFIXES
        .into_iter()
        .rev()
        .find(|&(_, step)| step <= power)
        .unwrap_or(PREFIXES[0]);
    let scaled = value * 10f64.powi(-step);
    let decimals = (2 - (power - step)).clamp(0, 2) as usize;
    format!("{scaled:.decimals$} {prefix}{unit}")
        .trim_end()
        .to_owned()
}

/// An area in um2, thousands separated by spaces: `12 480 um2`, `84.0 um2`, `3.25 um2`.
pub fn area(square_metres: f64) -> String {
    if let Some(text) = not_finite(square_metres) {
        return text.to_owned();
    }
    format!("{} um2", area_number(square_metres))
}

/// The number of [`area`], without its unit.
pub fn area_number(square_metres: f64) -> String {
    if let Some(text) = not_finite(square_metres) {
        return text.to_owned();
    }
    let value = square_metres * 1e12;
    let decimals = (2 - exponent(value, 3)).clamp(0, 2) as usize;
    let text = format!("{value:.decimals$}");
    let (sign, digits) = text
        .strip_prefix('-')
        .map_or(("", text.as_str()), |rest| ("-", rest));
    let (whole, rest) = digits.split_once('.').unwrap_or((digits, ""));
    let point = if rest.is_empty() { "" } else { "." };
    format!("{sign}{}{point}{rest}", grouped(whole))
}

/// A count with its thousands separated by spaces: `63 000`.
pub fn count(number: u64) -> String {
    grouped(&number.to_string())
}

/// Digits in groups of three.
fn grouped(digits: &str) -> String {
    let mut text = String::new();
    for (index, digit) in digits.chars().enumerate() {
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}

/// A drawn length in um, to the nanometre: `4.25 um`.
pub fn length(metres: f64) -> String {
    format!("{} um", length_number(metres))
}

/// The number of [`length`], without its unit.
pub fn length_number(metres: f64) -> String {
    not_finite(metres).map_or_else(|| trimmed(metres * 1e6, 3), str::to_owned)
}

/// A voltage to the millivolt: `0.250 V`.
pub fn volts(value: f64) -> String {
    not_finite(value).map_or_else(|| format!("{} V", volts_number(value)), str::to_owned)
}

/// The number of [`volts`], without its unit.
pub fn volts_number(value: f64) -> String {
    not_finite(value).map_or_else(
        || {
            let text = format!("{value:.3}");
            if text == "-0.000" {
                "0.000".to_owned()
            } else {
                text
            }
        },
        str::to_owned,
    )
}

/// A small voltage in millivolts: `62 mV`.
pub fn millivolts(value: f64) -> String {
    not_finite(value).map_or_else(|| format!("{} mV", trimmed(value * 1e3, 0)), str::to_owned)
}

/// A fraction in per cent: `1.24 %`, `0.043 %`, `12.5 %`.
pub fn percent(fraction: f64) -> String {
    if let Some(text) = not_finite(fraction) {
        return text.to_owned();
    }
    let value = fraction * 100.0;
    let decimals = match exponent(value, 3) {
        _ if value == 0.0 => 0,
        power if power >= 2 => 0,
        1 => 1,
        power if power >= -1 => 2,
        -2 => 3,
        _ => 4,
    };
    let text = format!("{value:.decimals$}");
    let zero = text
        .trim_start_matches('-')
        .chars()
        .all(|digit| matches!(digit, '0' | '.'));
    format!("{} %", if zero { "0" } else { &text })
}

/// A temperature in degrees Celsius: `-40 degC`.
pub fn celsius(kelvin: f64) -> String {
    format!("{} degC", trimmed(kelvin - 273.15, 1))
}

/// A dimensionless number of three significant digits, such as an inversion coefficient.
pub fn plain(value: f64) -> String {
    if let Some(text) = not_finite(value) {
        return text.to_owned();
    }
    let power = exponent(value, 3);
    if (-3..6).contains(&power) {
        format!("{value:.*}", (2 - power).max(0) as usize)
    } else {
        format!("{value:.2e}")
    }
}

/// A value in its SI unit ("m2", "m", "V", "1", "A", ...), in the form its kind is read in.
pub fn quantity(value: f64, unit: &str) -> String {
    match unit {
        "m2" => area(value),
        "m" => length(value),
        "V" => volts(value),
        "1" => percent(value),
        _ => engineering(value, unit),
    }
}

/// A number for a table read by programs: up to nine significant digits, no exponent between
/// 1e-4 and 1e9, empty where the value is not finite.
pub fn number(value: f64) -> String {
    if !value.is_finite() {
        return String::new();
    }
    if value == 0.0 {
        return "0".to_owned();
    }
    let power = exponent(value, 9);
    if (-4..9).contains(&power) {
        trimmed(value, (8 - power).max(0) as usize)
    } else {
        let text = format!("{value:.8e}");
        let (mantissa, power) = text.split_once('e').unwrap_or((&text, "0"));
        let mantissa = mantissa.trim_end_matches('0').trim_end_matches('.');
        format!("{mantissa}e{power}")
    }
}

/// The scale and the prefixed unit of a table column that holds values of an SI unit:
/// multiply by the first, head with the second.
pub fn column_unit(unit: &str) -> (f64, String) {
    match unit {
        "m2" => (1e12, "um2".to_owned()),
        "m" => (1e6, "um".to_owned()),
        "A" => (1e6, "uA".to_owned()),
        "W" => (1e6, "uW".to_owned()),
        "Ohm" => (1e-6, "MOhm".to_owned()),
        "1" => (1e2, "percent".to_owned()),
        other => (1.0, other.to_owned()),
    }
}

/// Scale factors of netlist element cards, rising.
const DECK_FACTORS: [(&str, i32); 9] = [
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("u", -6),
    ("m", -3),
    ("", 0),
    ("k", 3),
    ("meg", 6),
    ("g", 9),
];

/// A number on a netlist element card: `4.25u`, `125k`, `2.5meg`; nine significant digits.
///
/// On element cards `m` is milli and `meg` is mega, whatever the letter case.
pub fn deck(value: f64) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    let power = exponent(value, 9);
    match DECK_FACTORS
        .into_iter()
        .rev()
        .find(|&(_, step)| step <= power)
    {
        Some((factor, step)) if power < step + 3 => {
            let decimals = (8 - (power - step)).max(0) as usize;
            format!("{}{factor}", trimmed(value * 10f64.powi(-step), decimals))
        }
        _ => format!("{value:e}"),
    }
}

/// Plain text as it is printed: micro signs, ohm signs, superscripts, minus signs, thin spaces
/// in grouped digits and no line break between a number and its unit.
pub fn typeset(text: &str) -> String {
    let words: Vec<&str> = text.split(' ').collect();
    let mut printed = String::new();
    for (index, &word) in words.iter().enumerate() {
        if index > 0 {
            let before = words[index - 1];
            let number = starts_number(before) && ends_number(before);
            printed.push(match () {
                () if number && is_group(word) => '\u{202f}',
                () if number && is_unit(word) => '\u{a0}',
                () => ' ',
            });
        }
        let core = word.trim_end_matches([',', ';', ')', '.', ':']);
        let tail = &word[core.len()..];
        let after_number =
            index > 0 && starts_number(words[index - 1]) && ends_number(words[index - 1]);
        if after_number && word == "x" {
            printed.push('\u{d7}');
        } else if after_number && is_unit(word) {
            printed.push_str(&printed_unit(core));
        } else if let Some(number) = core.strip_prefix('-').filter(|rest| starts_number(rest)) {
            printed.push('\u{2212}');
            printed.push_str(number);
        } else {
            printed.push_str(core);
        }
        printed.push_str(tail);
    }
    printed
}

/// The words of a text, with a number and its unit, or the groups of one number, kept together.
pub fn words(text: &str) -> Vec<String> {
    let mut words: Vec<String> = Vec::new();
    let mut before = "";
    for word in text.split_whitespace() {
        let number = starts_number(before) && ends_number(before);
        match words.last_mut() {
            Some(last) if number && (is_unit(word) || is_group(word)) => {
                last.push(' ');
                last.push_str(word);
            }
            _ => words.push(word.to_owned()),
        }
        before = word;
    }
    words
}

/// Three digits, perhaps with decimals or punctuation after them: a group of a longer number.
fn is_group(word: &str) -> bool {
    word.get(..3)
        .is_some_and(|head| head.bytes().all(|byte| byte.is_ascii_digit()))
        && !word
            .get(3..4)
            .is_some_and(|next| next.bytes().all(|byte| byte.is_ascii_digit()))
}

fn starts_number(word: &str) -> bool {
    word.trim_start_matches(['-', '+', '('])
        .starts_with(|c: char| c.is_ascii_digit())
}

fn ends_number(word: &str) -> bool {
    word.ends_with(|c: char| c.is_ascii_digit())
}

fn is_unit(word: &str) -> bool {
    let core = word.trim_end_matches([',', ';', ')', '.', ':']);
    let base = core
        .strip_prefix(['a', 'f', 'p', 'n', 'u', 'm', 'k', 'M', 'G'])
        .unwrap_or("");
    const BASES: [&str; 6] = ["A", "V", "W", "Ohm", "m", "m2"];
    matches!(core, "%" | "degC" | "K") || BASES.contains(&core) || BASES.contains(&base)
}

/// A unit as it is printed: "um2" becomes "µm²".
pub fn printed_unit(unit: &str) -> String {
    let unit = unit
        .replace("Ohm", "Ω")
        .replace("degC", "°C")
        .replace("m2", "m²");
    match unit.strip_prefix('u') {
        Some(rest) => format!("µ{rest}"),
        None => unit,
    }
}
