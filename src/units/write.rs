//! Writing quantities: engineering notation and exact text.

/// Powers of a thousand that have a prefix.
const PREFIXES: [(i32, &str); 10] = [
    (-15, "f"),
    (-12, "p"),
    (-9, "n"),
    (-6, "u"),
    (-3, "m"),
    (0, ""),
    (3, "k"),
    (6, "M"),
    (9, "G"),
    (12, "T"),
];

/// Engineering notation with `digits` significant digits: `10.0 uA`, `2.50 MOhm`.
///
/// Lengths and areas are written in um and um2 wherever those read well, as the trade does;
/// temperatures in degC, at most two decimals; symbol `1` means a bare number. Values that no
/// prefix reaches are written with a power of ten. Digits before the decimal point are never
/// rounded away.
pub fn engineering(value: f64, symbol: &str, digits: usize) -> String {
    let digits = digits.clamp(1, 17);
    if symbol == "K" {
        return celsius(value, |v| {
            let text = format!("{v:.2}");
            text.trim_end_matches('0').trim_end_matches('.').to_owned()
        });
    }
    write(value, symbol, &|v| format!("{v:.*e}", digits - 1))
}

/// The shortest text that [`parse`](super::parse) reads back as the same value.
pub fn exact(value: f64, symbol: &str) -> String {
    if symbol == "K" && value.is_finite() {
        let text = celsius(value, |v| format!("{v}"));
        // The offset costs some values their last bit; kelvins never do.
        return match super::parse(&text) {
            Ok((back, _)) if back == value => text,
            _ => format!("{value} K"),
        };
    }
    write(value, symbol, &|v| format!("{v:e}"))
}

/// A fraction in per cent with `digits` significant digits: `1.50 %`.
pub fn percent(fraction: f64, digits: usize) -> String {
    let text = format!("{fraction:.*e}", digits.clamp(1, 17) - 1);
    match split(&text) {
        Some((sign, figures, power)) if (-6..7).contains(&power) => {
            format!("{sign}{} %", place(&figures, power + 2))
        }
        Some((sign, figures, power)) => format!("{sign}{} %", scientific(&figures, power + 2)),
        None => format!("{fraction} %"),
    }
}

fn celsius(kelvin: f64, write: impl Fn(f64) -> String) -> String {
    // The difference of the two decimals: 300.15 - 273.15 is not 27 in binary.
    let micro = (kelvin * 1e6).round();
    let text = write(if micro / 1e6 == kelvin {
        (micro - 273.15e6) / 1e6
    } else {
        kelvin - 273.15
    });
    format!("{} degC", if text == "-0" { "0" } else { &text })
}

fn write(value: f64, symbol: &str, scientific_form: &dyn Fn(f64) -> String) -> String {
    let text = scientific_form(value);
    let Some((sign, figures, power)) = split(&text) else {
        return format!("{value} {symbol}")
            .trim_end_matches(" 1")
            .to_owned();
    };
    let fixed = match symbol {
        // um between 1 nm and 10 mm, um2 between 0.001 um2 and 10 mm2.
        "m" if (-9..-2).contains(&power) => Some((-6, "um")),
        "m2" if (-15..-5).contains(&power) => Some((-12, "um2")),
        "m2" | "1" => Some((0, if symbol == "1" { "" } else { symbol })),
        _ => None,
    };
    let zero = figures.bytes().all(|b| b == b'0');
    if zero {
        let unit = fixed.map_or(
            symbol,
            |(_, unit)| if symbol == "1" { unit } else { symbol },
        );
        return join(sign, &place(&figures, 0), unit);
    }
    if let Some((base, unit)) = fixed {
        let power = power - base;
        let number = if (-6..9).contains(&power) {
            place(&figures, power)
        } else {
            scientific(&figures, power)
        };
        return join(sign, &number, unit);
    }
    match PREFIXES
        .iter()
        .find(|(base, _)| *base == power.div_euclid(3) * 3)
    {
        Some((base, prefix)) => join(
            sign,
            &place(&figures, power - base),
            &format!("{prefix}{symbol}"),
        ),
        None => join(sign, &scientific(&figures, power), symbol),
    }
}

fn join(sign: &str, number: &str, unit: &str) -> String {
    if unit.is_empty() {
        format!("{sign}{number}")
    } else {
        format!("{sign}{number} {unit}")
    }
}

/// Splits `-1.25e-6` into sign, digits and power; `None` for what is not finite.
fn split(text: &str) -> Option<(&str, String, i32)> {
    let (sign, body) = text
        .strip_prefix('-')
        .map_or(("", text), |body| ("-", body));
    let (mantissa, power) = body.split_once('e')?;
    Some((sign, mantissa.replace('.', ""), power.parse().ok()?))
}

/// Digits with the decimal point `power` places after the first.
fn place(figures: &str, power: i32) -> String {
    if power < 0 {
        return format!("0.{}{figures}", "0".repeat((-power - 1) as usize));
    }
    let whole = power as usize + 1;
    if figures.len() <= whole {
        return format!("{figures}{}", "0".repeat(whole - figures.len()));
    }
    format!("{}.{}", &figures[..whole], &figures[whole..])
}

fn scientific(figures: &str, power: i32) -> String {
    format!("{}e{power}", place(figures, 0))
}
