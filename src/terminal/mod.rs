//! The terminal: keys in, frames out, and everything as it was before on every way out.
//!
//! One thread reads keys, one waits for signals; both send into one channel, on which the loop waits. Between set-up and
//! restoring nothing returns early: an error ends the loop and is told afterwards.

mod keeper;
mod keys;
mod look;
mod profile_file;
mod watch;

use std::fmt;
use std::io::{self, IsTerminal, Write};
use std::panic;
use std::path::PathBuf;
use std::sync::mpsc::Receiver;

use crossterm::event::{self, DisableBracketedPaste, EnableBracketedPaste};
use crossterm::{cursor, execute, terminal as screen_mode};
use ratatui::DefaultTerminal;

pub use keeper::{Keeper, Settled};
pub use look::look_of_terminal;

use crate::app::{self, Event, Look, MeterFrom, Opening, Setup, Size, State};
use crate::log::Log;
use crate::{screen, tables};
use watch::{Message, Watch};

/// What the bench and `line` start with.
#[derive(Debug)]
pub struct Options {
    /// The meter and the tray.
    pub setup: Setup,
    /// Whose meter it is.
    pub meter_from: MeterFrom,
    /// Where the person's own profile is looked for, if that is known.
    pub profile_place: Option<PathBuf>,
    /// The log, open for writing.
    pub log: Log,
    /// The name of the lot.
    pub lot: String,
    /// Characters, colours and units: see [`look_of_terminal`].
    pub look: Look,
    /// Whether to ring.
    pub bell: Bell,
}

/// Whether to ring when something needs to be looked at.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Bell {
    /// Never.
    #[default]
    Silent,
    /// At questions, refusals and failures.
    Rings,
}

/// Why the bench could not be opened or went down.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Failure {
    /// The act: "cannot take over the terminal: …".
    pub message: String,
    /// The next thing to try.
    pub hint: String,
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}; {}", self.message, self.hint)
    }
}

impl std::error::Error for Failure {}

impl From<app::LogFailure> for Failure {
    fn from(failure: app::LogFailure) -> Self {
        Self {
            message: failure.message,
            hint: failure.hint,
        }
    }
}

impl Failure {
    fn of_terminal(act: &str, error: &io::Error) -> Self {
        Self {
            message: format!("cannot {act}: {error}"),
            hint: "`nulltray line` does the same without a screen".to_owned(),
        }
    }
}

impl Options {
    /// Reads what stands in the log and makes the state to begin with, and what performs its effects.
    ///
    /// # Errors
    /// If the log cannot be read.
    pub fn begin(self, size: Size) -> Result<(State, Keeper), app::LogFailure> {
        let keeper = Keeper::new(self.log, self.lot.clone());
        let state = app::open(Opening {
            setup: self.setup,
            meter_from: self.meter_from,
            profile_place: self.profile_place,
            look: self.look,
            lot: self.lot,
            standing: keeper.standing()?,
            codes: tables::rows(),
            size,
        });
        Ok((state, keeper))
    }
}

/// Opens the bench on the terminal and stays until the person leaves, the terminal closes or a signal says so. The terminal
/// is as it was afterwards.
///
/// # Errors
/// If there is no terminal, the log cannot be read, or the terminal can no longer be written to.
pub fn run(options: Options) -> Result<(), Failure> {
    if !io::stdout().is_terminal() {
        let missing = io::Error::other("the output is no terminal");
        return Err(Failure::of_terminal("draw the bench", &missing));
    }
    let bell = options.bell;
    let (width, height) = screen_mode::size()
        .map_err(|error| Failure::of_terminal("measure the terminal", &error))?;
    let (state, keeper) = options.begin(Size { width, height })?;
    let watch =
        Watch::for_signals().map_err(|error| Failure::of_terminal("wait for signals", &error))?;
    let mut terminal = ratatui::try_init()
        .map_err(|error| Failure::of_terminal("take over the terminal", &error))?;
    let before = panic::take_hook();
    panic::set_hook(Box::new(move |info| {
        leave();
        before(info);
    }));
    watch.for_keys();
    let ended = attend(&mut terminal, state, keeper, &watch.messages, bell);
    leave();
    drop(terminal);
    ended.map_err(|error| Failure::of_terminal("draw the bench", &error))
}

/// Gives the terminal back, its alternate screen empty: some terminals mix what is left there with the ordinary screen when
/// the size has changed meanwhile. What fails here fails because the terminal is gone: nobody is left to be told.
fn leave() {
    let _ = execute!(
        io::stdout(),
        screen_mode::Clear(screen_mode::ClearType::All),
        DisableBracketedPaste,
        cursor::Show
    );
    let _ = ratatui::try_restore();
}

/// Takes the terminal over again after the program was stopped.
fn enter_again() -> io::Result<()> {
    screen_mode::enable_raw_mode()?;
    execute!(
        io::stdout(),
        screen_mode::EnterAlternateScreen,
        EnableBracketedPaste
    )
}

/// The loop: shows the state, waits, takes in all that has come.
fn attend(
    terminal: &mut DefaultTerminal,
    mut state: State,
    mut keeper: Keeper,
    messages: &Receiver<Message>,
    bell: Bell,
) -> io::Result<()> {
    execute!(io::stdout(), EnableBracketedPaste)?;
    while !state.done {
        show(terminal, &state)?;
        let Ok(first) = messages.recv() else {
            return Ok(());
        };
        let mut next = Some(first);
        while let Some(message) = next {
            let rings = match take(terminal, &mut state, &mut keeper, message)? {
                Taken::Events(settled) => settled.n_bells,
                Taken::End => return Ok(()),
            };
            if rings > 0 && bell == Bell::Rings {
                io::stdout().write_all(b"\x07")?;
                io::stdout().flush()?;
            }
            next = if state.done {
                None
            } else {
                messages.try_recv().ok()
            };
        }
    }
    Ok(())
}

enum Taken {
    Events(Settled),
    End,
}

fn take(
    terminal: &mut DefaultTerminal,
    state: &mut State,
    keeper: &mut Keeper,
    message: Message,
) -> io::Result<Taken> {
    let mut settled = Settled::default();
    match message {
        Message::Input(event::Event::Paste(text)) => {
            for key in keys::typed(&text) {
                settled.add(keeper.settle(state, Event::Key(key)));
            }
        }
        Message::Input(event::Event::Resize(width, height)) => {
            let size = Size { width, height };
            settled.add(keeper.settle(state, Event::Resize(size)));
        }
        Message::Input(event::Event::Key(key)) => {
            if let Some(key) = keys::translated(key) {
                settled.add(keeper.settle(state, Event::Key(key)));
            }
        }
        Message::Input(_) => {}
        Message::Stop => {
            leave();
            watch::stop_here()?;
            enter_again()?;
            draw_whole(terminal)?;
        }
        Message::Continued => {
            enter_again()?;
            draw_whole(terminal)?;
        }
        Message::End => return Ok(Taken::End),
    }
    Ok(Taken::Events(settled))
}

fn show(terminal: &mut DefaultTerminal, state: &State) -> io::Result<()> {
    terminal.draw(|frame| {
        let area = frame.area();
        if let Some(place) = screen::draw(state, area, frame.buffer_mut()) {
            frame.set_cursor_position(place);
        }
    })?;
    Ok(())
}

/// Makes the next frame a whole one. (`Terminal::clear` would ask the terminal where the cursor is, and the answer would
/// go to the thread that reads keys.)
fn draw_whole(terminal: &mut DefaultTerminal) -> io::Result<()> {
    let size = terminal.size()?;
    terminal.resize(size.into())
}
