//! The two threads that wait: for keys and for signals.

use std::io;
use std::sync::mpsc::{self, Receiver, Sender};
use std::thread;

use crossterm::event;
use signal_hook::consts::{SIGCONT, SIGHUP, SIGINT, SIGTERM, SIGTSTP};
use signal_hook::iterator::Signals;
use signal_hook::low_level::emulate_default_handler;

/// Something that came from outside.
#[derive(Debug)]
pub(super) enum Message {
    /// A key, a paste, another size.
    Input(event::Event),
    /// The program is to stop for a while.
    Stop,
    /// It was stopped and goes on.
    Continued,
    /// It is to end: by a signal, or because the terminal is gone.
    End,
}

/// What the two threads send into, and what the loop waits on.
pub(super) struct Watch {
    sender: Sender<Message>,
    pub(super) messages: Receiver<Message>,
}

impl Watch {
    /// Starts the thread that waits for signals; it ends with the program.
    pub(super) fn for_signals() -> io::Result<Self> {
        let (sender, messages) = mpsc::channel();
        let mut signals = Signals::new([SIGTERM, SIGHUP, SIGINT, SIGTSTP, SIGCONT])?;
        let for_signals = sender.clone();
        thread::spawn(move || {
            for signal in signals.forever() {
                let message = match signal {
                    SIGTSTP => Message::Stop,
                    SIGCONT => Message::Continued,
                    _ => Message::End,
                };
                if for_signals.send(message).is_err() {
                    break;
                }
            }
        });
        Ok(Self { sender, messages })
    }

    /// Starts the thread that waits for keys, once the terminal is taken over; it ends with the program.
    pub(super) fn for_keys(&self) {
        let sender = self.sender.clone();
        thread::spawn(move || read_input(&sender));
    }
}

fn read_input(sender: &Sender<Message>) {
    loop {
        let message = match event::read() {
            Ok(input) => Message::Input(input),
            Err(error) if error.kind() == io::ErrorKind::Interrupted => continue,
            Err(_) => Message::End,
        };
        let is_last = matches!(message, Message::End);
        if sender.send(message).is_err() || is_last {
            return;
        }
    }
}

/// Stops the program until it is told to go on.
pub(super) fn stop_here() -> io::Result<()> {
    emulate_default_handler(SIGTSTP)
}
