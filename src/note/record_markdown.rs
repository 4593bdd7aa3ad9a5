//! The note as Markdown: what somebody typed is escaped, struck values are struck through.

use super::document::{Block, Piece, Words};
use super::face::{Face, ascii};
use super::record_note::{Told, blocks};

/// The note as Markdown.
pub fn of(told: &Told<'_>, face: Face) -> String {
    let mut text = String::new();
    let mut before = None;
    for block in blocks(told, face) {
        // Items that follow each other belong to one list; everything else stands apart.
        let listed = matches!(block, Block::Item(_) | Block::Below(_) | Block::Caution(_));
        if before.is_some_and(|was_listed: bool| !(was_listed && listed)) {
            text.push('\n');
        }
        before = Some(listed);
        text.push_str(&drawn(&block));
    }
    if face.ascii { ascii(&text) } else { text }
}

fn drawn(block: &Block) -> String {
    match block {
        Block::Title(words) => format!("# {}\n", marked(words)),
        Block::Heading(text) => format!("## {}\n", escaped(text)),
        Block::Line(words) => format!("{}\n", marked(words)),
        Block::Item(words) => format!("- {}\n", marked(words)),
        Block::Below(words) => format!("  - {}\n", marked(words)),
        Block::Gap => String::new(),
        Block::Caution(text) => format!("- **Caution:** {}\n", escaped(text)),
        Block::Table(head, rows) => table(head, rows),
    }
}

fn table(head: &[String], rows: &[Vec<String>]) -> String {
    let row = |cells: &[String]| {
        let cells: Vec<String> = cells.iter().map(|cell| escaped(cell)).collect();
        format!("| {} |\n", cells.join(" | "))
    };
    let rule = format!("|{}\n", " --- |".repeat(head.len()));
    let rows: String = rows.iter().map(|cells| row(cells)).collect();
    format!("{}{rule}{rows}", row(head))
}

fn marked(words: &Words) -> String {
    let piece = |piece: &Piece| match piece {
        Piece::Plain(text) | Piece::Typed(text) => escaped(text),
        Piece::Struck(text, by) => format!("~~{}~~ (struck: entry {by} corrects it)", escaped(text)),
    };
    let text: String = words.0.iter().map(piece).collect();
    // A line must not turn into a list, a heading or a number of its own.
    match text.chars().next() {
        Some('#' | '+' | '-' | '=') => format!("\\{text}"),
        _ => text,
    }
}

/// Text that Markdown shows as it is.
pub fn escaped(text: &str) -> String {
    let mut escaped = String::with_capacity(text.len());
    for letter in text.chars() {
        if matches!(
            letter,
            '\\' | '`' | '*' | '_' | '{' | '}' | '[' | ']' | '<' | '>' | '|' | '~' | '&' | '!' | '#' | '$'
        ) {
            escaped.push('\\');
        }
        escaped.push(letter);
    }
    escaped
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_typed_can_be_markup() {
        assert_eq!(
            escaped("a|b *c* <script> [x](y) ~~z~~"),
            "a\\|b \\*c\\* \\<script\\> \\[x\\](y) \\~\\~z\\~\\~"
        );
        assert_eq!(marked(&"- not a list".into()), "\\- not a list");
    }
}
