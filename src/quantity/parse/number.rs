//! A plain decimal number: digits, a point or a comma, a sign. No exponent, no hex, never infinite.

use super::Unread;

/// More digits than any quantity here has; longer texts are not numbers of this trade.
const LONGEST: usize = 24;

/// The number at the start of `text`, and what follows it.
pub(super) fn leading(text: &str) -> Result<(f64, &str), Unread> {
    let signs = text.find(|letter: char| !matches!(letter, '+' | '-' | '−')).unwrap_or(text.len());
    let (sign, unsigned) = text.split_at(signs);
    let end = unsigned
        .find(|letter: char| !letter.is_ascii_digit() && !matches!(letter, '.' | ','))
        .unwrap_or(unsigned.len());
    let (digits, rest) = unsigned.split_at(end);
    let astray = || Unread::NoNumber(text.to_owned());
    let negative = match sign {
        "" | "+" => false,
        "-" | "−" => true,
        _ => return Err(astray()),
    };
    if digits.len() > LONGEST || !digits.contains(|digit: char| digit.is_ascii_digit()) {
        return Err(astray());
    }
    let decimal = with_point(digits, text)?;
    let value: f64 = decimal.parse().map_err(|_| astray())?;
    Ok((if negative { -value } else { value }, rest))
}

/// All of `text` as a number.
pub(super) fn whole(text: &str) -> Result<f64, Unread> {
    let (value, rest) = leading(text)?;
    if rest.trim().is_empty() { Ok(value) } else { Err(Unread::NoNumber(text.to_owned())) }
}

/// Digits with a decimal comma turned into a point, where it can mean nothing else.
fn with_point(digits: &str, text: &str) -> Result<String, Unread> {
    let Some((before, after)) = digits.split_once(',') else { return Ok(digits.to_owned()) };
    let joined = format!("{before}{after}");
    if after.contains([',', '.']) || before.contains('.') {
        return Err(Unread::NoNumber(text.to_owned()));
    }
    // "1,234" may be thousands; "0,450" and "12,5" may not.
    if after.len() == 3 && (1..=3).contains(&before.len()) && !before.starts_with('0') {
        return Err(Unread::Comma {
            text: text.to_owned(),
            whole: joined,
            decimal: format!("{before}.{after}"),
        });
    }
    Ok(format!("{before}.{after}"))
}
