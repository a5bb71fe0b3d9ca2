//! Point lists: an x and a y a line.

use super::curve::Drawing;
use crate::error::{Error, Kind};

pub(super) fn read(_bytes: &[u8]) -> Result<Drawing, Error> {
    Err(Error::new(Kind::Input, "point lists are not read yet"))
}
