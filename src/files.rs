//! Files in and out: read whole, written whole or not at all.

use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use tempfile::NamedTempFile;

use crate::error::{Error, Kind};

/// Everything in the file at `path`.
///
/// # Errors
/// [`Kind::Input`] when it is missing, a folder, or cannot be read.
pub fn read(path: &Path) -> Result<Vec<u8>, Error> {
    let failed = |what: String, remedy: &str| {
        Error::new(Kind::Input, what).in_file(path.display().to_string()).remedy(remedy)
    };
    if path.is_dir() {
        return Err(failed("this is a folder, not a file".into(), "name the file inside it"));
    }
    fs::read(path).map_err(|why| match why.kind() {
        io::ErrorKind::NotFound => failed("there is no such file".into(), "check the name and the folder"),
        io::ErrorKind::PermissionDenied => {
            failed("reading it is not allowed".into(), "change its permissions")
        }
        _ => failed(format!("it cannot be read: {why}"), ""),
    })
}

/// Everything in the file at `path`, unless that is more than `most` bytes; `way_out` says what to do then.
///
/// # Errors
/// Those of [`read`]; [`Kind::Input`] when it is larger.
pub fn read_at_most(path: &Path, most: u64, way_out: &str) -> Result<Vec<u8>, Error> {
    let large = fs::metadata(path).is_ok_and(|known| known.is_file() && known.len() > most);
    if large {
        let what = format!("the file has more than {most} bytes, which is the limit");
        return Err(Error::new(Kind::Input, what).in_file(path.display().to_string()).remedy(way_out));
    }
    read(path)
}

/// Where an output goes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Target {
    /// Standard output.
    Stdout,
    /// A file.
    File(PathBuf),
}

impl Target {
    /// The place that `-o` names; `-` is standard output. Without one, beside `input` with the ending `extension`.
    pub fn new(asked: Option<&Path>, input: &Path, extension: &str) -> Self {
        match asked {
            Some(path) if path == Path::new("-") => Self::Stdout,
            Some(path) => Self::File(path.to_owned()),
            None => Self::File(input.with_extension(extension)),
        }
    }

    /// The place of part `k` of several: `sign.nc` becomes `sign-1.nc`. Standard output stays what it is.
    #[must_use]
    pub fn part(&self, k: usize) -> Self {
        self.beside(&k.to_string())
    }

    /// A place beside this one: `sign.nc` becomes `sign-air.nc` for the word `air`. Standard output stays what it is.
    #[must_use]
    pub fn beside(&self, word: &str) -> Self {
        let Self::File(path) = self else { return Self::Stdout };
        let mut name = path.file_stem().unwrap_or_default().to_owned();
        name.push(format!("-{word}"));
        if let Some(ending) = path.extension() {
            name.push(".");
            name.push(ending);
        }
        Self::File(path.with_file_name(name))
    }

    /// The name to show, for a file.
    pub fn name(&self) -> String {
        match self {
            Self::Stdout => "-".into(),
            Self::File(path) => path.display().to_string(),
        }
    }

    /// Refuses, before any work is done, what writing would refuse afterwards.
    ///
    /// # Errors
    /// [`Kind::Output`] when the target is one of `inputs` or exists and may not be replaced, or its folder is
    /// missing.
    pub fn check(&self, overwrite: bool, inputs: &[&Path]) -> Result<(), Error> {
        let Self::File(path) = self else { return Ok(()) };
        let refuse = |what: &str, remedy: &str| {
            Err(Error::new(Kind::Output, what).in_file(path.display().to_string()).remedy(remedy))
        };
        if inputs.iter().any(|input| same_file(path, input)) {
            return refuse("the output would replace its own input", "choose another name with -o");
        }
        if path.is_dir() {
            return refuse("the output is a folder", "name a file with -o");
        }
        if !folder(path).is_dir() {
            return refuse("the folder for the output does not exist", "make it, or choose another with -o");
        }
        if path.exists() && !overwrite {
            return refuse(
                "the output exists already and was left as it is",
                "choose another name with -o, or allow it to be replaced with --overwrite",
            );
        }
        Ok(())
    }

    /// Makes `bytes` ready to appear at the target, whole: in a temporary file in the same folder, flushed to the disk.
    ///
    /// # Errors
    /// [`Kind::Output`] when there is no room, or writing there is not allowed.
    pub fn stage(&self, bytes: &[u8]) -> Result<Staged, Error> {
        match self {
            Self::Stdout => Ok(Staged::Stdout(bytes.to_owned())),
            Self::File(path) => {
                let temporary = stage_file(path, bytes).map_err(|why| cannot_write(&self.name(), &why))?;
                Ok(Staged::File(temporary, path.clone()))
            }
        }
    }

    /// Writes `bytes` whole or not at all.
    ///
    /// # Errors
    /// [`Kind::Output`] when it cannot be written; what stood there before then stands there still.
    pub fn write(&self, bytes: &[u8], overwrite: bool) -> Result<(), Error> {
        self.stage(bytes)?.appear(overwrite)
    }
}

/// An output that is ready to appear; dropped, it leaves nothing behind.
#[derive(Debug)]
pub enum Staged {
    /// For standard output.
    Stdout(Vec<u8>),
    /// A temporary file beside the place it is meant for.
    File(NamedTempFile, PathBuf),
}

impl Staged {
    /// Lets the output appear in its place, in one step.
    ///
    /// # Errors
    /// [`Kind::Output`] when the place is taken and may not be replaced, or writing fails.
    pub fn appear(self, overwrite: bool) -> Result<(), Error> {
        match self {
            Self::Stdout(bytes) => {
                let mut out = io::stdout().lock();
                let written = out.write_all(&bytes).and_then(|()| out.flush());
                written.map_err(|why| cannot_write("standard output", &why))
            }
            Self::File(temporary, path) => {
                let kept =
                    if overwrite { temporary.persist(&path) } else { temporary.persist_noclobber(&path) };
                kept.map(drop).map_err(|why| cannot_write(&path.display().to_string(), &why.error))
            }
        }
    }
}

fn stage_file(path: &Path, bytes: &[u8]) -> io::Result<NamedTempFile> {
    let mut temporary = tempfile::Builder::new();
    temporary.prefix(".ribband-").suffix(".part");
    #[cfg(unix)]
    temporary.permissions(std::os::unix::fs::PermissionsExt::from_mode(0o666));
    let mut temporary = temporary.tempfile_in(folder(path))?;
    temporary.write_all(bytes)?;
    temporary.as_file().sync_all()?;
    Ok(temporary)
}

/// The error for an output that could not be written.
pub fn cannot_write(name: &str, why: &io::Error) -> Error {
    let remedy = match why.kind() {
        io::ErrorKind::AlreadyExists => {
            "choose another name with -o, or allow it to be replaced with --overwrite"
        }
        io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
            "change the folder's permissions, or choose another with -o"
        }
        io::ErrorKind::StorageFull => "make room, or choose another place with -o",
        _ => "",
    };
    Error::new(Kind::Output, format!("it cannot be written: {why}")).in_file(name).remedy(remedy)
}

fn folder(path: &Path) -> &Path {
    match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent,
        _ => Path::new("."),
    }
}

/// True when both paths lead to one file that exists, whatever links lie between.
fn same_file(a: &Path, b: &Path) -> bool {
    matches!((a.canonicalize(), b.canonicalize()), (Ok(a), Ok(b)) if a == b)
}
