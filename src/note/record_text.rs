//! The note as plain text that fits 80 columns and can be read aloud: no table is drawn, each row is a line.

use super::document::{Block, Piece, Words};
use super::face::{Face, ascii};
use super::record_note::{Told, blocks};

/// Width of the verdicts before the rows of a table.
const VERDICT: usize = 14;

/// The note as text.
pub fn of(told: &Told<'_>, face: Face) -> String {
    let mut text = String::new();
    for block in blocks(told, face) {
        text.push_str(&drawn(&block, face));
    }
    if face.ascii { ascii(&text) } else { text }
}

fn drawn(block: &Block, face: Face) -> String {
    match block {
        Block::Heading(text) => format!("\n{}", line(text, "", "  ", face)),
        Block::Title(words) | Block::Line(words) => line(&flat(words), "", "  ", face),
        Block::Item(words) => line(&flat(words), "  ", "    ", face),
        Block::Below(words) => line(&flat(words), "      ", "        ", face),
        Block::Gap => "\n".to_owned(),
        Block::Caution(text) => line(text, "  ! ", "    ", face),
        Block::Table(_, rows) => rows.iter().map(|row| table_row(row, face)).collect(),
    }
}

fn line(text: &str, first: &str, later: &str, face: Face) -> String {
    format!("{}\n", face.wrapped(text, first, later))
}

/// "  beyond        mechanical power: 24 (≤17 J/min)"
fn table_row(row: &[String], face: Face) -> String {
    let [name, value, others @ .., verdict] = row else { return String::new() };
    let value = if value.is_empty() { String::new() } else { format!(": {value}") };
    let others: Vec<&str> = others.iter().map(String::as_str).filter(|it| !it.is_empty()).collect();
    let others = if others.is_empty() { String::new() } else { format!(" ({})", others.join(", ")) };
    let text = format!("{verdict:<VERDICT$}{name}{value}{others}");
    line(&text, "  ", &" ".repeat(VERDICT + 4), face)
}

fn flat(words: &Words) -> String {
    let piece = |piece: &Piece| match piece {
        Piece::Plain(text) | Piece::Typed(text) => text.clone(),
        Piece::Struck(text, by) => format!("[STRUCK: {text}; entry {by} corrects it]"),
    };
    words.0.iter().map(piece).collect()
}
