//! The integration tests, one binary: a module a subject.

mod balance;
mod example;
mod judge;
mod layers;
mod logs;
mod markings;
mod planted;
mod profiles;
mod screens;
mod table;
mod tables;
