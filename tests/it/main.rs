//! The integration tests, one binary: a module a subject.

mod balance;
mod example;
mod judge;
mod layers;
mod logs;
mod planted;
mod profiles;
mod tables;
