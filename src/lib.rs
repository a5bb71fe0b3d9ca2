//! Traced outlines to router programs.
//!
//! Ribband reads jagged polylines, fairs them inside a stated tolerance, replaces them with tangent arcs and
//! lines, plans the cut, writes standard G-code, reads its own program back and checks it against the drawing.
//!
//! Millimetres and radians inside; y up; counter-clockwise positive.

pub mod cautions;
pub mod check;
pub mod clean;
pub mod cli;
pub mod compare;
pub mod condense;
pub mod error;
pub mod fair;
pub mod feed;
pub mod files;
pub mod fit;
pub mod gcode;
pub mod geom;
pub mod job;
pub mod machine;
pub mod measure;
pub mod num;
pub mod offset;
pub mod preview;
pub mod read;
pub mod report;
pub mod route;
pub mod run;
pub mod sketch;
pub mod summary;
pub mod toolpath;
