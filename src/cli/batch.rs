//! Several drawings in one call: each is done or refused by itself, several at a time, and told in order.

use std::collections::HashMap;
use std::path::{Path, PathBuf};

use rayon::prelude::*;

use super::{print, tell_error};
use crate::error::{Error, Kind};

/// So many drawings are under way before the next are begun: what is held does not grow with their number.
const AT_ONCE: usize = 32;

/// Carries out `act` for each of `drawings`, and prints what it tells, errors to standard error. Returns the exit
/// status: that of the worst.
///
/// # Errors
/// [`Kind::Output`] when standard output takes nothing.
pub(super) fn each(
    drawings: &[&Path],
    quiet: bool,
    act: impl Fn(&Path) -> Result<String, Error> + Sync,
) -> Result<u8, Error> {
    let (mut done, mut worst) = (0, 0);
    for some in drawings.chunks(AT_ONCE) {
        let ended: Vec<_> = some.par_iter().map(|drawing| act(drawing)).collect();
        for ended in ended {
            match ended {
                Ok(told) => {
                    done += 1;
                    if !quiet {
                        print(&told)?;
                    }
                }
                Err(error) => {
                    worst = worst.max(error.exit_status());
                    tell_error(&error);
                }
            }
        }
    }
    if !quiet {
        let (all, failed) = (drawings.len(), drawings.len() - done);
        let not = if failed == 0 { String::new() } else { format!(", {failed} not: the errors say why") };
        print(&format!("{all} drawings: {done} done{not}\n"))?;
    }
    Ok(worst)
}

/// The output of `drawing` with that `ending` in the folder that `option` names; beside the drawing where none is
/// named.
///
/// # Errors
/// [`Kind::Settings`] when what is named is no folder.
pub(super) fn place(
    folder: Option<&Path>,
    drawing: &Path,
    ending: &str,
    option: &str,
) -> Result<PathBuf, Error> {
    let beside = drawing.with_extension(ending);
    let Some(folder) = folder else { return Ok(beside) };
    if !folder.is_dir() {
        let what = format!("{option} must name a folder when there are several drawings");
        return Err(Error::new(Kind::Settings, what)
            .in_file(folder.display().to_string())
            .remedy("make the folder, or run the drawings one by one"));
    }
    Ok(folder.join(beside.file_name().unwrap_or_default()))
}

/// Refuses drawings that would write to one file: of the same place and name, or with a name that a part of another
/// one's program may have (`sign-1` beside `sign`).
///
/// # Errors
/// [`Kind::Settings`], naming both.
pub(super) fn apart(drawings: &[&Path], outputs: &[PathBuf]) -> Result<(), Error> {
    let mut known: HashMap<PathBuf, &Path> = HashMap::new();
    for (output, drawing) in outputs.iter().zip(drawings) {
        if let Some(other) = known.insert(output.clone(), drawing) {
            return Err(one_file(other, drawing, output));
        }
    }
    for (output, drawing) in outputs.iter().zip(drawings) {
        let whole = whole_of(output).and_then(|whole| known.get(&whole));
        if let Some(other) = whole {
            return Err(one_file(other, drawing, output));
        }
    }
    Ok(())
}

/// The program that one called `output` may be a part of.
fn whole_of(output: &Path) -> Option<PathBuf> {
    let stem = output.file_stem()?.to_str()?;
    let (whole, number) = stem.rsplit_once('-')?;
    number.parse::<u32>().ok()?;
    let mut name = whole.to_owned();
    if let Some(ending) = output.extension() {
        name = format!("{name}.{}", ending.to_str()?);
    }
    Some(output.with_file_name(name))
}

fn one_file(one: &Path, other: &Path, output: &Path) -> Error {
    let what = format!("{} and {} may both be written there", one.display(), other.display());
    Error::new(Kind::Settings, what)
        .in_file(output.display().to_string())
        .remedy("run one of them by itself, with another name after -o")
}
