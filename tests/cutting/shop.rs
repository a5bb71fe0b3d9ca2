//! A folder with drawings, and the command run in it.

use std::fs;

use assert_cmd::Command;
use serde_json::Value;

/// A plate with a round hole and a square island in it, a slot, and a bracket with a sharp inside corner.
const PLATE: &str = "<svg xmlns='http://www.w3.org/2000/svg' width='80mm' height='60mm' viewBox='0 0 80 60'>\
    <path d='M0 0H80V60H0Z'/><circle cx='40' cy='30' r='20'/><path d='M34 24H46V36H34Z'/></svg>";
const BRACKET: &str = "0,0\n60,0\n60,20\n20,20\n20,50\n0,50\n0,0\n";
const SLOT: &str = "0,0\n60,0\n60,25\n";
const NEARLY: &str = "0,0\n60,0\n60,40\n0,40\n0,0.4\n";

pub(crate) struct Shop(tempfile::TempDir);

/// How a command ended.
pub(crate) struct Ended {
    pub(crate) status: i32,
    pub(crate) out: String,
    pub(crate) err: String,
}

impl Shop {
    pub(crate) fn new() -> Self {
        let shop = Self(tempfile::tempdir().expect("a folder"));
        let drawings =
            [("plate.svg", PLATE), ("bracket.csv", BRACKET), ("slot.csv", SLOT), ("nearly.csv", NEARLY)];
        for (name, content) in drawings {
            shop.put(name, content);
        }
        shop
    }

    pub(crate) fn put(&self, name: &str, content: &str) {
        fs::write(self.0.path().join(name), content).expect("the folder takes a file");
    }

    pub(crate) fn text(&self, name: &str) -> String {
        fs::read_to_string(self.0.path().join(name)).expect(name)
    }

    pub(crate) fn path(&self, name: &str) -> std::path::PathBuf {
        self.0.path().join(name)
    }

    pub(crate) fn exists(&self, name: &str) -> bool {
        self.0.path().join(name).exists()
    }

    pub(crate) fn run(&self, typed: &[&str]) -> Ended {
        let mut command = Command::cargo_bin("ribband").expect("the binary is built");
        let out = command.current_dir(&self.0).args(typed).output().expect("it runs");
        Ended {
            status: out.status.code().unwrap_or(-1),
            out: String::from_utf8_lossy(&out.stdout).into_owned(),
            err: String::from_utf8_lossy(&out.stderr).into_owned(),
        }
    }

    /// `ribband post` as typed in one line, to `out.nc` and `out.json`.
    pub(crate) fn post(&self, line: &str) -> Ended {
        let _ = fs::remove_file(self.0.path().join("out.nc"));
        let unit = if line.contains(".csv") { &["--drawing-unit", "mm"][..] } else { &[] };
        let typed: Vec<&str> = line.split_whitespace().collect();
        let outputs = ["-o", "out.nc", "--report", "out.json", "--overwrite"];
        self.run(&[&["post"], &typed[..], unit, &outputs].concat())
    }

    /// The program and the report of a job that must be done.
    pub(crate) fn done(&self, line: &str) -> (String, Value) {
        let ended = self.post(line);
        assert_eq!(ended.status, 0, "{line}: {}", ended.err);
        (self.text("out.nc"), serde_json::from_str(&self.text("out.json")).expect("JSON"))
    }
}
