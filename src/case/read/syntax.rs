//! From bytes to a TOML table, and the syntax errors of TOML in words that say how to mend them.

use std::borrow::Cow;

use toml::de::DeTable;

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

/// The table, as much as could be read, and every syntax error.
pub(super) fn table(text: &str) -> (DeTable<'_>, Vec<Problem>) {
    let (table, errors) = DeTable::parse_recoverable(text);
    let mut problems: Vec<Problem> = Vec::new();
    for error in errors {
        let span = error.span().unwrap_or(0..0);
        // One slip makes the parser stumble more than once on the same line: the first says it best.
        let line = line_of(text, span.start);
        if problems
            .iter()
            .any(|known| known.span.as_ref().is_some_and(|span| line_of(text, span.start) == line))
        {
            continue;
        }
        let (message, help) = mend(error.message());
        problems.push(Problem::at(span, message, help));
    }
    (table.into_inner(), problems)
}

/// How many lines stand before a byte.
pub(super) fn line_of(text: &str, byte: usize) -> usize {
    text.bytes().take(byte).filter(|byte| *byte == b'\n').count()
}

/// The parser's words, and how to mend what they complain about.
fn mend(said: &str) -> (String, &'static str) {
    let is = |start: &str| said.starts_with(start);
    if is("duplicate key") {
        return (
            "this stands here a second time".to_owned(),
            "keep one of the two; what was charted later goes into a new [[entry]] at the end of the file",
        );
    }
    let help = if is("string values must be quoted") {
        "text stands in quotation marks, as in label = \"Bay 3\""
    } else if is("unexpected key or value") || is("extra") || is("unexpected content") {
        "one key = value a line; a number with a unit or a decimal comma stands in quotation marks, as in paco2 = \"8,4 kPa\""
    } else if is("unexpected leading zero") {
        "write the number without the zero in front: 7, not 07"
    } else if is("key with no value")
        || is("missing value")
        || is("missing assignment")
        || is("invalid key-value")
    {
        "write key = value, as in peep = 10, or take the line away"
    } else if is("unclosed") || is("missing table") || is("missing array") {
        "a table is named in brackets on a line of its own: [patient], [[entry]], [entry.settings]"
    } else if is("carriage return") || is("invalid comment") {
        "take away the invisible character, or type the line again"
    } else if is("missing escaped") || is("too few unicode") || is("invalid escape") {
        "write a backslash twice, or take it away"
    } else if said.contains("string") {
        "close the text with the quotation mark that it began with, on the same line"
    } else if is("cannot extend") {
        "each table is named once: [[entry]] with two brackets begins a new entry, [entry.gas] with one goes on with it"
    } else {
        "one key = value a line, text and units in quotation marks: look at an example with tidewright cases --show injured-lungs"
    };
    (format!("this line cannot be read: {said}"), help)
}
