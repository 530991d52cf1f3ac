//! Reading a number with its unit.
//!
//! All units used here are powers of ten of their SI unit, so the power is joined to the number's
//! digits before they become binary: `20 uA` is the double nearest to 2e-5, not a product of two
//! rounded factors.

use super::Fault;

/// Twice the exponents of volt, ampere, metre, second, kelvin, fraction and sigma: doubled, so that
/// the body factor's sqrt(V) is a whole number. A fraction (%) and a count of standard deviations
/// are kept apart from bare numbers, so that neither can be taken for the other.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Dimension([i16; 7]);

/// A unit: its dimension and the power of ten that takes it to SI.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Unit {
    /// What it measures.
    pub dimension: Dimension,
    /// Power of ten that takes a value to SI units.
    pub power: i32,
    /// Degrees Celsius: the zero lies at 273.15 K.
    pub celsius: bool,
}

/// Symbols, their doubled exponents and their power of ten; `prefix` says whether SI prefixes go
/// with them.
struct Symbol {
    text: &'static str,
    dimension: [i16; 7],
    power: i32,
    prefix: bool,
}

const fn symbol(text: &'static str, dimension: [i16; 7]) -> Symbol {
    Symbol {
        text,
        dimension,
        power: 0,
        prefix: true,
    }
}

const fn plain(text: &'static str, dimension: [i16; 7], power: i32) -> Symbol {
    Symbol {
        text,
        dimension,
        power,
        prefix: false,
    }
}

/// Volt, ampere, metre, second, kelvin, fraction, sigma.
const SYMBOLS: &[Symbol] = &[
    symbol("V", [2, 0, 0, 0, 0, 0, 0]),
    symbol("A", [0, 2, 0, 0, 0, 0, 0]),
    symbol("Ohm", [2, -2, 0, 0, 0, 0, 0]),
    symbol("ohm", [2, -2, 0, 0, 0, 0, 0]),
    symbol("\u{3a9}", [2, -2, 0, 0, 0, 0, 0]),
    symbol("\u{2126}", [2, -2, 0, 0, 0, 0, 0]),
    symbol("W", [2, 2, 0, 0, 0, 0, 0]),
    symbol("F", [-2, 2, 0, 2, 0, 0, 0]),
    symbol("m", [0, 0, 2, 0, 0, 0, 0]),
    plain("cm", [0, 0, 2, 0, 0, 0, 0], -2),
    symbol("s", [0, 0, 0, 2, 0, 0, 0]),
    symbol("Hz", [0, 0, 0, -2, 0, 0, 0]),
    // As mobilities are written, cm2/Vs.
    plain("Vs", [2, 0, 0, 2, 0, 0, 0], 0),
    plain("K", [0, 0, 0, 0, 2, 0, 0], 0),
    plain("%", [0, 0, 0, 0, 0, 2, 0], -2),
    plain("ppm", [0, 0, 0, 0, 0, 2, 0], -6),
    plain("sigma", [0, 0, 0, 0, 0, 0, 2], 0),
    // A square of a resistor is a number.
    plain("sq", [0; 7], 0),
];

/// Degrees Celsius stand apart: alone they carry an offset, in a product they are kelvins.
const CELSIUS: [&str; 3] = ["degC", "\u{b0}C", "\u{2103}"];

const PREFIXES: &[(char, i32)] = &[
    ('f', -15),
    ('p', -12),
    ('n', -9),
    ('u', -6),
    ('\u{b5}', -6),
    ('\u{3bc}', -6),
    ('m', -3),
    ('k', 3),
    ('M', 6),
    ('G', 9),
    ('T', 12),
];

/// Dimensions that have a name of their own, for messages.
const NAMES: &[(&str, [i16; 7])] = &[
    ("a bare number", [0; 7]),
    ("a voltage", [2, 0, 0, 0, 0, 0, 0]),
    ("a current", [0, 2, 0, 0, 0, 0, 0]),
    ("a resistance", [2, -2, 0, 0, 0, 0, 0]),
    ("a power", [2, 2, 0, 0, 0, 0, 0]),
    ("a capacitance", [-2, 2, 0, 2, 0, 0, 0]),
    ("a length", [0, 0, 2, 0, 0, 0, 0]),
    ("an area", [0, 0, 4, 0, 0, 0, 0]),
    ("a time", [0, 0, 0, 2, 0, 0, 0]),
    ("a frequency", [0, 0, 0, -2, 0, 0, 0]),
    ("a temperature", [0, 0, 0, 0, 2, 0, 0]),
    ("a fraction", [0, 0, 0, 0, 0, 2, 0]),
    ("a number of standard deviations", [0, 0, 0, 0, 0, 0, 2]),
];

impl Dimension {
    /// A number without a unit.
    pub const NUMBER: Dimension = Dimension([0; 7]);

    /// Its name in a sentence, where it has one: "a current".
    pub fn name(self) -> Option<&'static str> {
        NAMES
            .iter()
            .find(|(_, exponents)| *exponents == self.0)
            .map(|(name, _)| *name)
    }
}

impl Unit {
    fn times(self, other: Unit, sign: i16) -> Unit {
        let mut exponents = self.dimension.0;
        for (to, from) in exponents.iter_mut().zip(other.dimension.0) {
            *to += sign * from;
        }
        Unit {
            dimension: Dimension(exponents),
            power: self.power + i32::from(sign) * other.power,
            celsius: false,
        }
    }

    fn raised(self, exponent: i16) -> Unit {
        Unit {
            dimension: Dimension(self.dimension.0.map(|e| e * exponent)),
            power: self.power * i32::from(exponent),
            celsius: false,
        }
    }

    /// Square root; `None` where it would leave quarter exponents or a broken power of ten.
    fn root(self) -> Option<Unit> {
        let whole = self.power % 2 == 0 && self.dimension.0.iter().all(|e| e % 2 == 0);
        whole.then(|| Unit {
            dimension: Dimension(self.dimension.0.map(|e| e / 2)),
            power: self.power / 2,
            celsius: false,
        })
    }
}

/// Longest unit text looked at; keeps exponents and nesting far from any overflow.
const LONGEST_UNIT: usize = 40;

/// Reads a unit such as `uA/V^2`, `mV um`, `cm2/(V s)`, `sqrt(V)`, `1/K`; empty for a bare number.
pub fn parse_unit(text: &str) -> Result<Unit, Fault> {
    let unknown = || Fault::UnknownUnit {
        unit: text.trim().to_owned(),
        hint: unit_hint(text),
    };
    let text = text.trim();
    if CELSIUS.contains(&text) {
        return Ok(Unit {
            celsius: true,
            ..symbol_unit("K").ok_or_else(unknown)?
        });
    }
    if text.len() > LONGEST_UNIT {
        return Err(unknown());
    }
    let mut rest = Scanner { rest: text };
    let unit = rest.product().ok_or_else(unknown)?;
    if rest.rest.is_empty() {
        Ok(unit)
    } else {
        Err(unknown())
    }
}

/// Reads a number with its unit into SI units.
pub fn parse(text: &str) -> Result<(f64, Unit), Fault> {
    let (number, rest) = split_number(text)?;
    let unit = parse_unit(rest)?;
    Ok((number.value(unit)?, unit))
}

/// The digits of a number and its written power of ten.
pub(super) struct Number {
    digits: String,
    power: i32,
}

impl Number {
    pub(super) fn value(&self, unit: Unit) -> Result<f64, Fault> {
        let power = self.power.saturating_add(unit.power);
        // Digits and power were scanned: this parse cannot fail, only overflow to infinity.
        let value: f64 = format!("{}e{power}", self.digits)
            .parse()
            .map_err(|_| Fault::NotFinite)?;
        let value = if unit.celsius { kelvin(value) } else { value };
        if value.is_finite() {
            Ok(value)
        } else {
            Err(Fault::NotFinite)
        }
    }
}

/// Degrees Celsius in kelvin. The sum of the two decimals, not of their binary neighbours: -40 degC
/// is the double nearest to 233.15.
fn kelvin(celsius: f64) -> f64 {
    let micro = (celsius * 1e6).round();
    if micro / 1e6 == celsius {
        (micro + 273.15e6) / 1e6
    } else {
        celsius + 273.15
    }
}

/// Splits the number off the front of a quantity.
pub(super) fn split_number(text: &str) -> Result<(Number, &str), Fault> {
    let text = text.trim();
    if text.is_empty() {
        return Err(Fault::Empty);
    }
    let (sign, body) = match text.chars().next() {
        Some('+') => ("", &text[1..]),
        Some('-') => ("-", &text[1..]),
        Some(c @ '\u{2212}') => ("-", &text[c.len_utf8()..]),
        _ => ("", text),
    };
    let word: String = body
        .chars()
        .skip_while(|c| *c == '.')
        .take_while(|c| c.is_alphabetic())
        .collect::<String>()
        .to_lowercase();
    if matches!(
        word.as_str(),
        "nan" | "inf" | "infinity" | "infinite" | "unlimited" | "none"
    ) {
        return Err(Fault::NotFinite);
    }
    let whole = digits_at(body);
    let mut end = whole;
    if body[end..].starts_with('.') {
        end += 1 + digits_at(&body[end + 1..]);
    }
    if whole == 0 && end <= 1 {
        return Err(Fault::NotANumber);
    }
    let digits = format!("{sign}{}", &body[..end]);
    if body[end..].starts_with(',') && digits_at(&body[end + 1..]) > 0 {
        return Err(Fault::DecimalComma);
    }
    let mut power = 0;
    if let Some(exponent) = body[end..].strip_prefix(['e', 'E']) {
        let signed = exponent.strip_prefix(['+', '-']).unwrap_or(exponent);
        let length = exponent.len() - signed.len() + digits_at(signed);
        if digits_at(signed) > 0 {
            // A power beyond this range is zero or infinity whatever its digits.
            power = exponent[..length]
                .parse::<i32>()
                .unwrap_or(if exponent.starts_with('-') {
                    -99_999
                } else {
                    99_999
                });
            end += 1 + length;
        }
    }
    Ok((Number { digits, power }, &body[end..]))
}

fn digits_at(text: &str) -> usize {
    text.bytes().take_while(u8::is_ascii_digit).count()
}

fn symbol_unit(text: &str) -> Option<Unit> {
    let find = |name: &str, prefixed: bool| {
        SYMBOLS
            .iter()
            .find(|s| s.text == name && (s.prefix || !prefixed))
            .map(|s| Unit {
                dimension: Dimension(s.dimension),
                power: s.power,
                celsius: false,
            })
    };
    if CELSIUS.contains(&text) {
        return find("K", false);
    }
    find(text, false).or_else(|| {
        let first = text.chars().next()?;
        let (_, power) = PREFIXES.iter().find(|(prefix, _)| *prefix == first)?;
        let unit = find(&text[first.len_utf8()..], true)?;
        Some(Unit {
            power: unit.power + power,
            ..unit
        })
    })
}

/// What the writer probably meant by a unit that does not exist.
fn unit_hint(text: &str) -> Option<String> {
    let text = text.trim();
    if matches!(text, "C" | "c" | "deg" | "deg C" | "celsius" | "Celsius") {
        return Some("degrees Celsius are written degC".to_owned());
    }
    let mut candidates: Vec<String> = Vec::new();
    for s in SYMBOLS.iter().filter(|s| s.text.is_ascii()) {
        candidates.push(s.text.to_owned());
        if s.prefix {
            candidates.extend(
                PREFIXES
                    .iter()
                    .map(|(prefix, _)| format!("{prefix}{}", s.text)),
            );
        }
    }
    let meant = candidates
        .iter()
        .find(|c| c.eq_ignore_ascii_case(text) || format!("{c}s").eq_ignore_ascii_case(text))?;
    Some(format!(
        "did you mean \"{meant}\"? capital and small letters differ in units"
    ))
}

/// A unit expression read from left to right.
struct Scanner<'a> {
    rest: &'a str,
}

impl Scanner<'_> {
    fn take(&mut self, start: &str) -> bool {
        let rest = self.rest.strip_prefix(start);
        self.rest = rest.unwrap_or(self.rest);
        rest.is_some()
    }

    /// Factors side by side or joined by `*`, `.`, `/`; a slash divides by the next factor only.
    fn product(&mut self) -> Option<Unit> {
        let mut unit = Unit::default();
        let mut first = true;
        loop {
            self.rest = self.rest.trim_start();
            if self.rest.is_empty() || self.rest.starts_with(')') {
                return Some(unit);
            }
            let over = self.take("/");
            let joined = over || (!first && ["*", "\u{b7}", "."].iter().any(|dot| self.take(dot)));
            if joined {
                self.rest = self.rest.trim_start();
            }
            let factor = self.factor()?;
            unit = unit.times(factor, if over { -1 } else { 1 });
            first = false;
        }
    }

    fn factor(&mut self) -> Option<Unit> {
        if self.take("sqrt(") {
            return self.closed()?.root();
        }
        if self.take("(") {
            let unit = self.closed()?;
            return self.power(unit);
        }
        // The one of "1/K".
        if self.take("1") {
            return self.rest.trim_start().starts_with('/').then(Unit::default);
        }
        let end = self
            .rest
            .find(|c: char| !(c.is_alphabetic() || matches!(c, '%' | '\u{b0}' | '\u{2103}')))
            .unwrap_or(self.rest.len());
        let (name, rest) = self.rest.split_at(end);
        self.rest = rest;
        let unit = symbol_unit(name)?;
        self.power(unit)
    }

    fn closed(&mut self) -> Option<Unit> {
        let unit = self.product()?;
        self.take(")").then_some(unit)
    }

    /// An exponent: `^2`, `2`, `\u{b2}`, `^-1`, `^0.5`.
    fn power(&mut self, unit: Unit) -> Option<Unit> {
        for (text, exponent) in [("\u{b2}", 2), ("\u{b3}", 3)] {
            if self.take(text) {
                return Some(unit.raised(exponent));
            }
        }
        let marked = self.take("^") || self.take("**");
        if marked && (self.take("0.5") || self.take("(1/2)")) {
            return unit.root();
        }
        let minus = marked && self.take("-");
        match self.rest.bytes().next() {
            Some(digit @ b'1'..=b'9') => {
                self.rest = &self.rest[1..];
                let exponent = i16::from(digit - b'0');
                Some(unit.raised(if minus { -exponent } else { exponent }))
            }
            _ if marked => None,
            _ => Some(unit),
        }
    }
}
