//! The layers of the crate: each room uses the rooms below it, and none beside or above.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

/// What each room may use of the others. Errors, quantities and geometry are for all.
const ROOMS: &[(&str, &[&str])] = &[
    ("error", &[]),
    ("num", &["error"]),
    ("geom", &["num"]),
    ("sketch", &["geom"]),
    ("toolpath", &["geom"]),
    ("machine", &["error", "num"]),
    ("files", &["error"]),
    ("cautions", &[]),
    ("job", &["error", "files", "machine", "num", "sketch"]),
    ("read", &["error", "geom", "num", "sketch"]),
    ("clean", &["error", "geom", "num", "sketch"]),
    ("measure", &["clean", "sketch"]),
    ("fair", &["error", "geom", "num"]),
    ("fit", &["error", "fair", "geom", "num", "clean"]),
    ("offset", &["error", "geom", "job", "num"]),
    ("route", &["clean", "error", "geom", "job", "machine", "num", "offset", "toolpath"]),
    ("feed", &["error", "geom", "machine", "num", "toolpath"]),
    ("gcode::read", &["error", "geom", "machine", "num", "toolpath"]),
    ("gcode::write", &["error", "geom", "machine", "num", "toolpath"]),
    ("condense", &["error", "feed", "fit", "gcode", "geom", "machine", "num", "toolpath"]),
    ("check", &["gcode", "geom", "machine", "num", "sketch", "toolpath"]),
    (
        "preview",
        &[
            "cautions", "check", "error", "feed", "gcode", "geom", "machine", "num", "report", "sketch",
            "summary", "toolpath",
        ],
    ),
    ("summary", &["num", "report"]),
    ("report", &["check", "error", "job", "machine"]),
    ("compare", &["clean", "error", "job", "num", "preview", "run", "summary"]),
    (
        "cli",
        &[
            "cautions", "compare", "condense", "error", "files", "job", "machine", "measure", "num",
            "preview", "read", "report", "run", "summary",
        ],
    ),
];

/// Every Rust file below `folder`.
fn files(folder: &Path) -> Vec<PathBuf> {
    let entries =
        fs::read_dir(folder).expect("the source folder").map(|entry| entry.expect("an entry").path());
    let (folders, files): (Vec<_>, Vec<_>) = entries.partition(|path| path.is_dir());
    files
        .into_iter()
        .filter(|path| path.extension().is_some_and(|e| e == "rs"))
        .chain(folders.iter().flat_map(|f| crate::files(f)))
        .collect()
}

/// The room of a source file: its first folder or its own name; the program reader and writer are rooms apart.
fn room(path: &Path, source: &Path) -> String {
    let inside = path.strip_prefix(source).expect("below the source folder").with_extension("");
    let parts: Vec<_> = inside.iter().map(|part| part.to_string_lossy().into_owned()).collect();
    match parts[..] {
        [ref first, ref second, ..] if first == "gcode" && second != "mod" => format!("gcode::{second}"),
        _ => parts[0].clone(),
    }
}

/// The rooms that a file names after `crate::`, uses and full paths alike, doc comments left out.
fn used(text: &str) -> BTreeSet<String> {
    let code =
        text.lines().filter(|line| !line.trim_start().starts_with("//")).collect::<Vec<_>>().join("\n");
    let word = |rest: &str| rest.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect::<String>();
    let mut all: BTreeSet<String> =
        code.split("crate::").skip(1).filter(|rest| !rest.starts_with('{')).map(word).collect();
    for group in code.split("use crate::{").skip(1) {
        let mut depth = 0;
        let inner = group.split('}').next().unwrap_or("");
        for part in inner.split(',') {
            if depth == 0 {
                all.insert(word(part.trim()));
            }
            depth += part.matches('{').count() as i32 - part.matches('}').count() as i32;
        }
    }
    if code.contains("gcode::read") || code.contains("gcode::{read") {
        all.insert("gcode::read".into());
    }
    all
}

#[test]
fn every_room_uses_only_the_rooms_below_it() {
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut breaches = Vec::new();
    for path in files(&source) {
        let room = room(&path, &source);
        let Some((_, allowed)) = ROOMS.iter().find(|(name, _)| *name == room) else { continue };
        let text = fs::read_to_string(&path).expect("a source file");
        let own = room.split("::").next().unwrap_or("");
        for name in used(&text).iter().filter(|name| !name.is_empty() && !name.contains("::")) {
            if name != own && !allowed.contains(&name.as_str()) {
                breaches.push(format!("{} uses {name}", path.display()));
            }
        }
    }
    assert!(breaches.is_empty(), "{breaches:#?}");
}

#[test]
fn every_file_belongs_to_a_known_room() {
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let top = ["lib", "main", "run", "gcode"];
    let known = |room: &str| top.contains(&room) || ROOMS.iter().any(|(name, _)| *name == room);
    let strangers: BTreeSet<String> =
        files(&source).iter().map(|path| room(path, &source)).filter(|room| !known(room)).collect();
    assert!(strangers.is_empty(), "rooms without a layer: {strangers:?}");
}

#[test]
fn the_program_reader_and_the_check_know_nothing_of_the_writer() {
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    for path in files(&source.join("gcode/read")).into_iter().chain(files(&source.join("check"))) {
        let text = fs::read_to_string(&path).expect("a source file");
        let code = text.lines().filter(|line| !line.trim_start().starts_with("//"));
        let writes: Vec<&str> =
            code.filter(|line| line.contains("write::") || line.contains("gcode::write")).collect();
        assert!(writes.is_empty(), "{} reaches for the writer: {writes:?}", path.display());
    }
}
