//! nulltray sorts salvaged capacitors at the bench.
//!
//! One assembly line, each station a module that knows only those above it:
//! text and units ([`quantity`]), facts ([`tables`]), what is printed on a part ([`marking`]), where it nulls and what a
//! reading means ([`meter`]), whether it is inside its limits ([`finding`]), where it goes ([`tray`]), what the person sees
//! and does ([`app`], [`screen`]). The edges are [`log`] (disk), [`terminal`] (keys and screen) and [`cli`] (commands).

#![cfg_attr(not(test), warn(clippy::unwrap_used))]

pub mod quantity;

pub mod tables;

pub mod marking;

pub mod meter;

pub mod finding;

pub mod tray;

pub mod app;

pub mod screen;

pub mod log;

pub mod terminal;

pub mod cli;
