//! The terminal: one way in, and one way out for quitting, errors, panics, signals and stopping for the shell.

use std::io::{self, IsTerminal, Stdout, Write};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};

use ratatui::Terminal;
use ratatui::backend::CrosstermBackend;
use ratatui::crossterm::event::{
    DisableBracketedPaste, DisableMouseCapture, EnableBracketedPaste, EnableMouseCapture,
};
use ratatui::crossterm::style::force_color_output;
use ratatui::crossterm::terminal::{
    EnterAlternateScreen, LeaveAlternateScreen, disable_raw_mode, enable_raw_mode,
};
use ratatui::crossterm::{cursor, execute};

use super::theme::{Depth, Ground};

/// The terminal drawn on.
pub type Screen = Terminal<CrosstermBackend<Stdout>>;

/// Held while the terminal is written to, so that a signal does not cut a drawing in two.
static WRITING: Mutex<()> = Mutex::new(());
/// Whether the terminal is ours just now.
static OURS: AtomicBool = AtomicBool::new(false);

/// Waits until nobody writes.
pub fn writing() -> MutexGuard<'static, ()> {
    WRITING.lock().unwrap_or_else(PoisonError::into_inner)
}

/// Takes the terminal: raw keys, its other screen, pasted text as one event, the mouse where wanted.
///
/// # Errors
/// When the terminal refuses.
pub fn enter(mouse: bool) -> io::Result<()> {
    // We decide about colour; crossterm would otherwise still send an empty sequence that wipes reverse and bold.
    force_color_output(true);
    OURS.store(true, Ordering::SeqCst);
    enable_raw_mode()?;
    execute!(io::stdout(), EnterAlternateScreen, EnableBracketedPaste)?;
    if mouse {
        execute!(io::stdout(), EnableMouseCapture)?;
    }
    Ok(())
}

/// Gives the terminal back as it was; more than once does no harm. Nothing is reported: there may be nobody left to tell.
pub fn restore() {
    if !OURS.swap(false, Ordering::SeqCst) {
        return;
    }
    let mut out = io::stdout();
    let _ = execute!(out, DisableMouseCapture, DisableBracketedPaste, LeaveAlternateScreen, cursor::Show);
    let _ = disable_raw_mode();
    let _ = out.flush();
}

/// Listens to the mouse, or leaves it to the terminal.
///
/// # Errors
/// When the terminal refuses.
pub fn mouse(on: bool) -> io::Result<()> {
    if on { execute!(io::stdout(), EnableMouseCapture) } else { execute!(io::stdout(), DisableMouseCapture) }
}

/// Has a panic give the terminal back before it speaks.
pub fn restore_on_panic() {
    let before = std::panic::take_hook();
    std::panic::set_hook(Box::new(move |about| {
        restore();
        before(about);
    }));
}

/// Has TERM, HUP and INT give the terminal back and end the program; what was typed is on the disk already. TSTP stops
/// it with the terminal given back, as Ctrl-Z does.
///
/// # Errors
/// When the signals cannot be listened to.
#[cfg(unix)]
pub fn restore_on_signals() -> io::Result<()> {
    use signal_hook::consts::{SIGHUP, SIGINT, SIGTERM, SIGTSTP, SIGWINCH};
    let mut signals = signal_hook::iterator::Signals::new([SIGTERM, SIGHUP, SIGINT, SIGTSTP])?;
    std::thread::Builder::new().name("signals".to_owned()).spawn(move || {
        for signal in signals.forever() {
            let held = writing();
            restore();
            if signal == SIGTSTP {
                let _ = signal_hook::low_level::emulate_default_handler(SIGTSTP);
                // Continued: the terminal is taken again, and the size "changed" so that all is drawn anew.
                let _ = enter(true);
                drop(held);
                let _ = signal_hook::low_level::raise(SIGWINCH);
            } else {
                let _ = signal_hook::low_level::emulate_default_handler(signal);
                // Where the default does not end the program, this does: 128 and the signal, as shells count.
                std::process::exit(128 + signal);
            }
        }
    })?;
    Ok(())
}

/// Elsewhere there are no such signals.
///
/// # Errors
/// None.
#[cfg(not(unix))]
pub fn restore_on_signals() -> io::Result<()> {
    Ok(())
}

/// Stops for the shell, as Ctrl-Z does elsewhere; comes back when continued.
///
/// # Errors
/// When the terminal cannot be taken again.
pub fn suspend(mouse_on: bool) -> io::Result<()> {
    restore();
    #[cfg(unix)]
    {
        let _ = signal_hook::low_level::emulate_default_handler(signal_hook::consts::SIGTSTP);
    }
    enter(mouse_on)
}

/// Whether there is a terminal to draw on and to read keys from.
pub fn there() -> bool {
    io::stdin().is_terminal() && io::stdout().is_terminal()
}

/// How many colours the terminal says it has.
pub fn depth() -> Depth {
    let said = |name: &str| std::env::var(name).unwrap_or_default();
    match (said("COLORTERM").as_str(), said("TERM").as_str()) {
        (_, "dumb") => Depth::None,
        ("truecolor" | "24bit", _) => Depth::True,
        _ => Depth::Sixteen,
    }
}

/// Whether the letters stand on dark or light: as the terminal says in its environment, else as it answers within a
/// twentieth of a second, else dark.
pub fn ground() -> Ground {
    let said = std::env::var("COLORFGBG").unwrap_or_default();
    if let Some(colour) = said.rsplit(';').next().and_then(|colour| colour.parse::<u8>().ok()) {
        return if matches!(colour, 7 | 9..=15) { Ground::Light } else { Ground::Dark };
    }
    let mut options = terminal_colorsaurus::QueryOptions::default();
    options.timeout = std::time::Duration::from_millis(50);
    match terminal_colorsaurus::theme_mode(options) {
        Ok(terminal_colorsaurus::ThemeMode::Light) => Ground::Light,
        _ => Ground::Dark,
    }
}
