//! The integration tests, one binary: a module a subject.

mod balance;
mod calibrate;
mod cli;
mod coverage;
mod derivatives;
mod example;
mod judge;
mod killed;
mod lamp;
mod layers;
mod logs;
mod markings;
mod marks;
mod planted;
mod printings;
mod profiles;
mod properties;
mod pty;
mod screens;
mod spice;
mod standards;
mod stated;
mod strd;
mod table;
mod tables;
mod truth;
