//! Sides, holding and depth from the command line: whole programs, what is told of them, and what is refused.

mod again;
mod cutters;
mod dry;
mod jobs;
mod layers;
mod laying;
mod programs;
mod refused;
mod setting;
mod shop;
