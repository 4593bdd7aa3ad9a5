//! From bytes to a TOML table, and the syntax errors of TOML in words that say how to mend them.

use std::borrow::Cow;
use std::ops::Range;

use toml::de::DeTable;

use super::walk::shown;
use crate::case::problem::Problem;

const BOM: &[u8] = b"\xEF\xBB\xBF";

/// The text that spans count in, and that is drawn: without a byte-order mark, what is not UTF-8 replaced by `�`.
pub fn as_shown(bytes: &[u8]) -> Cow<'_, str> {
    String::from_utf8_lossy(bytes.strip_prefix(BOM).unwrap_or(bytes))
}

/// The bytes as text.
pub(super) fn text(bytes: &[u8]) -> Result<&str, Problem> {
    let bytes = bytes.strip_prefix(BOM).unwrap_or(bytes);
    let help = "save the file as UTF-8, the usual choice of an editor's \"save as\", and try again";
    if bytes.starts_with(b"\xFF\xFE") || bytes.starts_with(b"\xFE\xFF") {
        return Err(Problem {
            span: None,
            ..Problem::at(0..0, "the file is UTF-16 text, and only UTF-8 is read", help)
        });
    }
    std::str::from_utf8(bytes).map_err(|error| {
        let start = error.valid_up_to();
        let byte = bytes.get(start).copied().unwrap_or_default();
        // Each byte that is not UTF-8 is drawn as one `�`, three bytes long.
        Problem::at(
            start..start + 3,
            format!("the file is not UTF-8 text: it holds the byte {byte:02X} here"),
            help,
        )
    })
}

/// Syntax errors, and where other problems cannot be trusted because of them.
#[derive(Default)]
pub(super) struct Slips {
    pub problems: Vec<Problem>,
    /// The line of each slip; below a header that could not be read, everything up to the next header.
    hidden: Vec<Range<usize>>,
}

/// More slips than this are not looked for: whoever has as many has the wrong file, or one slip repeated.
const MOST: usize = 100;

impl Slips {
    /// Whether what is said of `byte` may only follow from a slip.
    pub(super) fn hide(&self, byte: usize) -> bool {
        self.hidden.iter().any(|hidden| hidden.contains(&byte))
    }

    fn add(&mut self, text: &str, byte: usize, problem: Problem) {
        let line = Line::at(text, byte);
        let mut end = line.start + line.text.len() + 1;
        if line.text.trim_start().starts_with('[') {
            let below = text.get(end..).unwrap_or("").split_inclusive('\n');
            end += below.take_while(|line| !line.trim_start().starts_with('[')).map(str::len).sum::<usize>();
        }
        self.hidden.push(line.start..end);
        self.problems.push(problem);
    }
}

/// The table, as much as could be read, and every syntax error.
pub(super) fn table(text: &str) -> (DeTable<'_>, Slips) {
    let (table, errors) = DeTable::parse_recoverable(text);
    let table = table.into_inner();
    let mut slips = Slips::default();
    for error in errors {
        let span = error.span().unwrap_or(0..0);
        // One slip makes the parser stumble more than once: the first of a line says it best.
        if slips.hide(span.start) {
            continue;
        }
        let (message, help) = mend(error.message(), &Line::at(text, span.start), span.start);
        slips.add(text, span.start, Problem::at(span, message, help));
        if slips.problems.len() == MOST {
            break;
        }
    }
    // Not one key was read: this is not a slip in a case, it is another kind of file.
    if table.is_empty() && !slips.problems.is_empty() {
        slips.problems.truncate(1);
        for slip in &mut slips.problems {
            let message = "this does not look like a case or a profile: no line of it is key = value";
            let help =
                "is it the right file? tidewright cases --show injured-lungs prints a case to start from";
            *slip = Problem::at(slip.span.clone().unwrap_or(0..0), message, help);
        }
    }
    (table, slips)
}

struct Line<'t> {
    start: usize,
    text: &'t str,
}

impl<'t> Line<'t> {
    fn at(text: &'t str, byte: usize) -> Self {
        let start = text.get(..byte).and_then(|before| before.rfind('\n')).map_or(0, |end| end + 1);
        let text = text.get(start..).and_then(|rest| rest.lines().next()).unwrap_or("");
        Self { start, text }
    }

    /// The key and the value of a line, its comment left out.
    fn halves(&self) -> Option<(&'t str, &'t str)> {
        let (key, value) = self.text.split_once('=')?;
        let value = value.split_once('#').map_or(value, |(value, _)| value);
        Some((key.trim(), value.trim())).filter(|(key, _)| !key.is_empty())
    }
}

/// The parser's words made plain, and how to mend what they complain about.
fn mend(said: &str, line: &Line<'_>, byte: usize) -> (String, String) {
    let is = |start: &str| said.starts_with(start);
    let plain = |message: &str, help: &str| (message.to_owned(), help.to_owned());
    let letter = line.text.get(byte.saturating_sub(line.start)..).and_then(|rest| rest.chars().next());
    let value_astray = ["string values", "unexpected key or value", "unexpected content", "missing value"];
    if let Some((key, value)) = line.halves().filter(|_| value_astray.into_iter().any(is)) {
        return unquoted(&shown(key), &shown(value));
    }
    if is("duplicate key") {
        plain(
            "this key or table stands here for the second time",
            "keep one of the two; what was charted later goes into a new [[entry]] at the end of the file",
        )
    } else if is("key with no value") || is("missing assignment") || is("invalid key-value") {
        plain(
            "there is no equals sign on this line",
            "write key = value, as in peep = 10; remarks begin with #",
        )
    } else if said.contains("string") && letter.is_some_and(char::is_control) {
        plain(
            "this text holds an invisible control character",
            "take it away, or type the text again without copying it",
        )
    } else if said.contains("string") {
        plain(
            "the quotation mark is not closed",
            "close the text with the quotation mark that it began with, on the same line",
        )
    } else if is("unclosed") || is("missing table") || is("missing array") {
        plain(
            "a bracket is not closed",
            "a table is named in brackets on a line of its own, as in [patient], [[entry]], [entry.settings]",
        )
    } else if is("unexpected leading zero") {
        plain("a number does not begin with a zero here", "write 5 for 05")
    } else if is("invalid date") || is("invalid time") {
        let help = "write, for example, at = 2026-03-04T08:10:00+01:00".to_owned();
        (format!("this is no time that exists: {said}"), help)
    } else {
        let help = if is("carriage return") || is("invalid comment") {
            "take away the invisible character, or type the line again"
        } else if is("missing escaped") || is("too few unicode") || is("invalid escape") {
            "write a backslash twice, or take it away"
        } else if is("cannot extend") {
            "each table is named once: [[entry]] with two brackets begins a new entry, [entry.gas] with one goes on with it"
        } else {
            "one key = value a line, text and units in quotation marks: tidewright cases --show injured-lungs prints an example"
        };
        (format!("this line cannot be read: {said}"), help.to_owned())
    }
}

/// A value that should stand in quotation marks, or that is not there at all.
fn unquoted(key: &str, value: &str) -> (String, String) {
    if value.is_empty() {
        let help = "write key = value, as in peep = 10, or take the line away".to_owned();
        return ("there is no value after the equals sign".to_owned(), help);
    }
    let quoted = value.replace('"', "");
    let bare = quoted.trim_start_matches(['-', '+']);
    let numeric = bare.starts_with(|first: char| first.is_ascii_digit());
    if numeric && bare.chars().all(|letter| letter.is_ascii_digit() || letter == ',') {
        let point = quoted.replacen(',', ".", 1);
        let message = "a decimal comma is only understood in quotation marks".to_owned();
        return (message, format!("write {key} = {point}, or {key} = \"{quoted}\""));
    }
    let message = if numeric {
        "a number with its unit stands in quotation marks"
    } else {
        "text stands in quotation marks"
    };
    (message.to_owned(), format!("write {key} = \"{quoted}\""))
}
