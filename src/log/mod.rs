//! The log on disk: one file that holds every entry ever made, and never loses or changes one.
//!
//! In go a [`Record`](crate::app::Record), a time and the text of the profile in force; out comes a number, once the entry is on
//! disk. Nothing here reads the clock or knows what a capacitor is.
//!
//! # The file
//! A database file of version 1 with three tables:
//!
//! - `profile`: the whole text of each profile once, found again by its CRC-32 *and* its text;
//! - `entry`: one row for everything that ever happened, numbered 1, 2, 3 … without a gap. A trigger refuses to change or erase a
//!   row. Its kind is `part`, `check` or `zero` (an entry of the person), `void` (takes an entry back) or `redo` (takes a `void` row
//!   back);
//! - `tally`: how many entries stand, by lot, kind, finding and compartment. It follows from `entry`, is kept in the same transaction and
//!   checked by [`Log::verify`].
//!
//! # What stands
//! A `void` row names the entry it takes back, a `redo` row the `void` row it takes back, a replacement the entry it replaces.
//!
//! - A row is *taken back* if a `void` or `redo` row names it that is not itself taken back.
//! - An entry is *voided* if it is taken back, or if a replacement names it that is not taken back.
//!
//! So undoing a replacement brings the older entry back, and replacing a replacement does not. Only a standing entry can be taken back
//! or replaced, and a row names only earlier rows of its own lot; reading a lot backwards therefore meets every row that voids an entry
//! before the entry itself, and needs no index.
//!
//! Undo takes back the last standing entry of the lot. Redo brings back what was taken back last, as often as undo was used, until a new
//! entry is made in that lot: then there is nothing to bring back, as in any editor.
//!
//! # Safety
//! Rollback journal with full synchronisation, folder included, so that [`Log::append`] returns only when the entry is on disk. Before and
//! after each change the device and number of the file at the path are compared with those at opening: an entry written to a log that was
//! moved away is an error. Pages carry no checksum of their own, so each row has one, `sum`: the CRC-32 of its other columns in order, each as
//! `n;` (empty), `i` decimal `;`, `r` sixteen hexadecimal digits of the bits `;` or `t` length in bytes `:` text `;`. Numbers without a gap
//! and a tally that accounts for each row show rows that are gone. Whatever does not agree is an error, never an answer; [`salvage`] gathers
//! what is left from the pages, whatever leads to them.
//!
//! One process should not [`salvage`] a log while it holds the same log open: reading the raw file ends the locks of the process on it.
//!
//! # Why a tally, and what it costs
//! Every start of the bench wants the number of parts in each compartment. Three ways were compared with these tables in a small trial program
//! apart (engine 3.40, two cores with other work beside, five rounds in turn; entries of 38 columns, 200 in a lot, 12 kinds of count in each):
//!
//! | way | bytes written a commit | median commit | counts of 100,000 entries, over all; by lot |
//! |---|---|---|---|
//! | nothing, read all | 17,200 | 1.3–1.7 ms | 64–111 ms; 169–259 ms |
//! | index on lot, kind, finding, compartment | 28,650 | 1.5–1.8 ms | 31–43 ms; 45–101 ms, and it knows nothing of undo |
//! | **tally** | 25,970 | 1.5–1.7 ms | below |
//!
//! A commit waits for the disk, not for bytes: with a busier disk the order changed from round to round. The tally is walked whole, so it takes
//! time by lots: 6,000 counts in 500 lots for 100,000 entries. That is also what finds lost rows, so it is done at each opening, and again only
//! when something happened since; every change is a new row, so the number of the last row tells.
//!
//! This module, release build, medians: opening, the last 20 entries of a lot and all counts together take 0.37, 0.92 and 6.6 ms with 1,000,
//! 10,000 and 100,000 entries (6.9 ms with other work beside); all live entries of 100,000 into memory 0.44 s, [`Log::verify`] of them 0.66 s,
//! [`salvage`] of half of them 0.68 s. An entry took 0.78 and 0.94 ms where a bare append with `fdatasync` took 0.22 and 0.23 ms (3.5 to 4
//! times), and 20 to 24 ms where other programs kept the disk busy and the bare append took 4.0 ms. `cargo bench --bench log` repeats it; the two
//! run one after the other, so their ratio holds only on a quiet disk.

mod append;
mod backup;
mod failure;
mod open;
mod pages;
mod read;
mod row;
mod salvage;
mod schema;
mod standing;
mod tally;
mod undo;
mod verify;

use std::cell::RefCell;
use std::path::PathBuf;

use rusqlite::Connection;

pub use open::Start;
pub use read::Which;
pub use salvage::{Salvage, salvage};
pub use tally::{Count, Counts, Lot};
pub use verify::Damage;

/// An open log.
///
/// Several handles, in one program or in many, may use the same file at once; one waits for the other up to five seconds.
#[derive(Debug)]
pub struct Log {
    connection: Connection,
    /// As given, made absolute: for messages, and to see whether the file is still there.
    path: PathBuf,
    identity: open::Identity,
    /// The counts as they were read last.
    counts: RefCell<Counts>,
}
