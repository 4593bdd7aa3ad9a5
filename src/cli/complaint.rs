//! Problems drawn for standard error: file, line and column, the text at fault underlined, what to do.

use std::ops::Range;

use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet};

use crate::case::problem::Problem;

/// No more than this many are drawn; the rest is counted. Whoever has more has the wrong file, or one slip repeated.
const MOST: usize = 60;

/// Draws problems. `source` is the path (or another name) of the text and the text as shown (see
/// [`as_shown`](crate::case::read::as_shown)); `None` for flags, which are then named. Ends with a line break; empty
/// when there is no problem.
pub fn draw(problems: &[Problem], source: Option<(&str, &str)>, colour: bool) -> String {
    let renderer = if colour { Renderer::styled() } else { Renderer::plain() };
    let mut drawn = String::new();
    for problem in problems.iter().take(MOST) {
        let error = located(problem, source);
        let help = Group::with_title(Level::HELP.secondary_title(problem.help.as_str()));
        if source.is_some() {
            drawn.push_str(&renderer.render(&[error, help]));
        } else {
            // Without a text between them the renderer would join the two by an empty gutter.
            drawn.push_str(&renderer.render(&[error]));
            drawn.push('\n');
            drawn.push_str(&renderer.render(&[help]));
        }
        drawn.push_str("\n\n");
    }
    let more = problems.len().saturating_sub(MOST);
    if more > 0 {
        drawn.push_str(&renderer.render(
            &[
                Group::with_title(
                    Level::NOTE.secondary_title(format!(
                        "{more} more like these; mend the first ones and look again"
                    )),
                ),
            ],
        ));
        drawn.push('\n');
    }
    // The renderer makes the usual control characters visible, but not these, the first of which begins an escape
    // sequence on some terminals (U+009B).
    let mut drawn = drawn.replace(|letter| matches!(letter, '\u{80}'..='\u{9F}'), "\u{FFFD}");
    let kept = drawn.trim_end().len();
    drawn.truncate(kept);
    if !drawn.is_empty() {
        drawn.push('\n');
    }
    drawn
}

fn located<'a>(problem: &'a Problem, source: Option<(&'a str, &'a str)>) -> Group<'a> {
    let title = Level::ERROR.primary_title(match (source, flag(problem)) {
        (None, Some(flag)) => format!("{flag}: {}", problem.message),
        _ => problem.message.clone(),
    });
    match (source, &problem.span) {
        (Some((path, text)), Some(span)) => title.element(snippet(path, text, span, &problem.also)),
        (Some((path, _)), None) => title.element(Origin::path(path)),
        (None, _) => Group::with_title(title),
    }
}

/// The flag that gave the most telling value: its key, with dashes.
fn flag(problem: &Problem) -> Option<String> {
    let key = problem.places.first().map(|place| place.key).filter(|key| !key.is_empty())?;
    Some(format!("--{}", key.replace('_', "-")))
}

/// The lines from the first place to the last, so that a long file is not gone through again for each problem.
fn snippet<'a>(
    path: &'a str,
    text: &'a str,
    span: &Range<usize>,
    also: &[Range<usize>],
) -> Snippet<'a, annotate_snippets::Annotation<'a>> {
    let first = also.iter().map(|other| other.start).min().map_or(span.start, |start| start.min(span.start));
    let last = also.iter().map(|other| other.end).max().map_or(span.end, |end| end.max(span.end));
    let start = text.get(..first).and_then(|before| before.rfind('\n')).map_or(0, |end| end + 1);
    let end = text.get(last..).and_then(|after| after.find('\n')).map_or(text.len(), |length| last + length);
    let window = text.get(start..end).unwrap_or(text);
    let line_start = text.get(..start).map_or(1, |before| before.matches('\n').count() + 1);
    let within = |range: &Range<usize>| {
        let shift = |byte: usize| byte.saturating_sub(start).min(window.len());
        shift(range.start)..shift(range.end)
    };
    Snippet::source(window)
        .path(path)
        .line_start(line_start)
        .annotation(AnnotationKind::Primary.span(within(span)))
        .annotations(also.iter().map(|other| AnnotationKind::Context.span(within(other))))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::fault::{Fault, Place};

    #[test]
    fn nothing_wrong_draws_nothing() {
        assert_eq!(draw(&[], None, false), "");
    }

    #[test]
    fn eight_bit_control_characters_never_reach_the_terminal() {
        let text = "label = \"\u{9b}2J\u{85}\"\n";
        let drawn =
            draw(&[Problem::at(0..5, "a \u{9b} in words", "mend it")], Some(("bed.toml", text)), false);
        assert!(!drawn.contains(['\u{9b}', '\u{85}']) && drawn.contains('\u{FFFD}'));
    }

    #[test]
    fn colour_is_only_drawn_when_asked_for() {
        let problem = [Problem::at(0..1, "too fast", "write rate = 22")];
        let source = Some(("bed.toml", "b = 220\n"));
        assert!(draw(&problem, source, true).contains("\u{1b}["));
        assert!(!draw(&problem, source, false).contains('\u{1b}'));
    }

    #[test]
    fn a_flag_is_named() {
        let fault = Fault::new([Place::in_entry(1, "settings", "tidal_volume")], "too small", "write more");
        let drawn = draw(&[fault.into()], None, false);
        assert_eq!(drawn, "error: --tidal-volume: too small\nhelp: write more\n");
    }

    #[test]
    fn a_span_is_underlined_at_its_line_and_column() {
        let problem = Problem::at(9..12, "too fast", "write rate = 22");
        let drawn = draw(&[problem], Some(("bed.toml", "a = 1\nb = 220\n")), false);
        assert_eq!(
            drawn,
            "error: too fast\n --> bed.toml:2:4\n  |\n2 | b = 220\n  |    ^^^\n  |\nhelp: write rate = 22\n"
        );
    }
}
