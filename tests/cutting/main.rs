//! Sides, holding and depth from the command line: whole programs, what is told of them, and what is refused.

mod layers;
mod laying;
mod programs;
mod refused;
mod setting;
mod shop;
