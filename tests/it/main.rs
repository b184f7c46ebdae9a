//! The integration tests, one binary: a module a subject.

mod balance;
mod cli;
mod calibrate;
mod coverage;
mod example;
mod judge;
mod killed;
mod layers;
mod logs;
mod markings;
mod planted;
mod profiles;
mod properties;
mod pty;
mod screens;
mod table;
mod stated;
mod strd;
mod tables;
mod truth;
