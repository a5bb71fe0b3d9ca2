//! gcode: not built yet.
