//! Shell completions and the manual page, made by the binary itself.

use clap::CommandFactory;
use clap_complete::Shell;

use super::args::Arguments;
use super::print;
use crate::error::Error;
use crate::files::cannot_write;

/// The completions for `shell`, to standard output.
pub(super) fn completions(shell: Shell) -> Result<(), Error> {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Arguments::command(), "ribband", &mut script);
    print(&String::from_utf8_lossy(&script))
}

/// The manual page, to standard output: of the program, then of each command.
pub(super) fn manual() -> Result<(), Error> {
    let mut command = Arguments::command();
    command.build();
    let mut page = Vec::new();
    for part in std::iter::once(&command).chain(command.get_subcommands()) {
        let rendered = clap_mangen::Man::new(part.clone()).render(&mut page);
        rendered.map_err(|why| cannot_write("standard output", &why))?;
    }
    print(&String::from_utf8_lossy(&page))
}
