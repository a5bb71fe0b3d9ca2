//! Bad input and bad settings: the right status, one message that names file, line and remedy, and no output.

use std::fs;
use std::path::{Path, PathBuf};

use assert_cmd::Command;

use crate::formats::Contours;

/// A folder of its own for each test, with a square of 20 mm in it.
pub(crate) struct Shop {
    folder: tempfile::TempDir,
}

/// How a command ended.
pub(crate) struct Ended {
    pub(crate) status: i32,
    pub(crate) out: String,
    pub(crate) err: String,
}

impl Shop {
    pub(crate) fn new() -> Self {
        let shop = Self { folder: tempfile::tempdir().expect("a folder") };
        shop.put("square.csv", "0,0\n20,0\n20,20\n0,20\n0,0\n");
        shop
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub(crate) fn put(&self, name: &str, content: impl AsRef<[u8]>) {
        fs::write(self.path(name), content).expect("the folder takes a file");
    }

    pub(crate) fn text(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).expect(name)
    }

    /// The names in the folder, sorted.
    pub(crate) fn names(&self) -> Vec<String> {
        let entries = fs::read_dir(self.folder.path()).expect("the folder can be listed");
        let name = |entry: Result<fs::DirEntry, _>| entry.expect("an entry").file_name();
        let mut names: Vec<String> = entries.map(|e| name(e).to_string_lossy().into_owned()).collect();
        names.sort();
        names
    }

    /// Runs `ribband` in the folder.
    pub(crate) fn run(&self, typed: &[&str]) -> Ended {
        self.run_with(typed, &[])
    }

    /// Runs `ribband` in the folder with some environment.
    pub(crate) fn run_with(&self, typed: &[&str], environment: &[(&str, &str)]) -> Ended {
        let mut command = Command::cargo_bin("ribband").expect("the binary is built");
        let out = command.current_dir(&self.folder).args(typed).envs(environment.iter().copied()).output();
        let out = out.expect("it runs");
        Ended {
            status: out.status.code().unwrap_or(-1),
            out: String::from_utf8_lossy(&out.stdout).into_owned(),
            err: String::from_utf8_lossy(&out.stderr).into_owned(),
        }
    }

    /// Runs `ribband post` to `out.nc`, in mm and 3 deep.
    pub(crate) fn post(&self, drawing: &str, more: &[&str]) -> Ended {
        let typed = ["post", drawing, "--depth", "3", "--drawing-unit", "mm", "-o", "out.nc"];
        self.run(&[&typed, more].concat())
    }
}

/// Drawings that cannot be cut: name, content, status, and what the message must say.
fn bad_drawings() -> Vec<(&'static str, Vec<u8>, i32, &'static [&'static str])> {
    let square = Contours::from_csv("0,0\n20,0\n20,20\n0,20\n0,0\n");
    let dxf = square.dxf();
    vec![
        ("empty.csv", vec![], 3, &["empty.csv"]),
        ("blank.csv", b"\n\n".to_vec(), 3, &["blank.csv"]),
        ("binary.dat", (0..=255).cycle().take(5000).collect(), 3, &["binary.dat"]),
        ("cut-short.dxf", dxf.as_bytes()[..dxf.len() * 2 / 3].to_vec(), 3, &["cut-short.dxf"]),
        (
            "path.svg",
            square.svg().replace("10", "1o").replace("20,0", "2o,0").into_bytes(),
            3,
            &["path.svg", "line"],
        ),
        ("nan.csv", b"0,0\n1,0\nnan,1\n".to_vec(), 3, &["nan.csv, line 3"]),
        ("huge.csv", b"0,0\n1,0\n1e400,1\n".to_vec(), 3, &["huge.csv, line 3"]),
        ("point.csv", b"5,5\n".to_vec(), 3, &["point.csv"]),
        // Found by fuzzing: the box of the curve is small, its points are not.
        (
            "astray.svg",
            b"<svg width=\"100mm\" height=\"80mm\" viewBox=\"0 0 100 80\" xmlns=\"http://www.w3.org/2000/svg\">\
              <path transform=\"rotate(30) scale(2 -1)\" d=\"M70 10Q-1e308 20 90 10\"/></svg>"
                .to_vec(),
            3,
            &["astray.svg"],
        ),
        ("large.csv", b"0,0\n2000,0\n2000,10\n0,0\n".to_vec(), 1, &["large.csv", "1300 x 1300", "--machine"]),
    ]
}

#[test]
fn a_bad_drawing_is_told_and_leaves_what_was_there() {
    for (name, content, status, said) in bad_drawings() {
        let shop = Shop::new();
        shop.put(name, content);
        shop.put("out.nc", "as it was");
        let before = shop.names();
        let ended = shop.post(name, &["--overwrite"]);
        assert_eq!(ended.status, status, "{name}: {}", ended.err);
        for word in said {
            assert!(ended.err.contains(word), "{name} does not say {word}: {}", ended.err);
        }
        assert_eq!(ended.err.matches("error:").count(), 1, "{name}: one message: {}", ended.err);
        assert!(ended.out.is_empty(), "{name} prints {}", ended.out);
        assert_eq!(shop.text("out.nc"), "as it was", "{name}");
        assert_eq!(shop.names(), before, "{name} leaves a file behind");
    }
}

#[test]
fn a_missing_file_and_a_folder_are_no_input() {
    let shop = Shop::new();
    fs::create_dir(shop.path("folder")).expect("a folder");
    for (drawing, said) in [("missing.svg", "no such file"), ("folder", "is a folder")] {
        let ended = shop.post(drawing, &[]);
        assert_eq!(ended.status, 3, "{drawing}: {}", ended.err);
        assert!(ended.err.contains(drawing) && ended.err.contains(said), "{drawing}: {}", ended.err);
        assert!(!shop.path("out.nc").exists(), "{drawing}");
    }
}

#[test]
fn an_unknown_scale_is_refused_with_the_size_in_each_unit() {
    let shop = Shop::new();
    let ended = shop.run(&["post", "square.csv", "--depth", "3", "-o", "out.nc"]);
    assert_eq!(ended.status, 1, "{}", ended.err);
    for said in ["square.csv", "20.0 x 20.0 mm", "508.0 x 508.0 mm", "--drawing-unit", "--fit-width"] {
        assert!(ended.err.contains(said), "does not say {said}: {}", ended.err);
    }
    assert_eq!(shop.names(), ["square.csv"]);
}

/// Settings that cannot stand: what is typed beside the drawing, the status, what is said.
const BAD_SETTINGS: [(&[&str], i32, &str); 20] = [
    (&[], 2, "--depth"),
    (&["--depth", "0"], 2, "depth is 0 mm"),
    (&["--depth=-3"], 2, "depth is -3 mm"),
    (&["--depth", "six"], 2, "--depth"),
    (&["--depth", "3", "--tolerance", "nan"], 2, "--tolerance"),
    (&["--depth", "3", "--tolerance", "20"], 2, "tolerance is 20 mm"),
    (&["--depth", "3", "--tolerance", "0.002"], 1, "decimals"),
    (&["--depth", "3", "--feed", "90000"], 1, "feed is 90000 mm/min"),
    (&["--depth", "3", "--spindle", "50000"], 1, "spindle is 50000 rev/min"),
    (&["--depth", "3", "--spindle", "100"], 1, "no slower"),
    (&["--depth", "60"], 1, "flutes"),
    (&["--depth", "200", "--cutter", "6.1mm"], 1, "travel in Z"),
    (&["--depth", "3", "--pass", "0.0001"], 2, "pass is 0.0001 mm"),
    (&["--depth", "3", "--cutter", "7mn"], 2, "6mm"),
    (&["--depth", "3", "--machine", "shop-routr"], 2, "shop-router"),
    (&["--depth", "3", "--machine", "no/such.toml"], 2, "no such file"),
    (&["--depth", "3", "--zero", "bed"], 2, "--thickness"),
    (&["--depth", "3", "--scale", "2", "--fit-width", "3mm"], 2, "cannot be used with"),
    (&["--depth", "3", "--drawing-unit", "ell"], 2, "--drawing-unit"),
    (&["--depth", "3", "--job", "no.toml"], 2, "no.toml"),
];

#[test]
fn settings_are_judged_before_the_drawing_is_read() {
    let shop = Shop::new();
    for (typed, status, said) in BAD_SETTINGS {
        let ended = shop.run(&[&["post", "missing.csv", "-o", "out.nc"], typed].concat());
        assert_eq!(ended.status, status, "{typed:?}: {}", ended.err);
        assert!(ended.err.contains(said), "{typed:?} does not say {said}: {}", ended.err);
        assert!(!shop.path("out.nc").exists(), "{typed:?}");
    }
}

/// Job files that are wrong, and what is said.
const BAD_JOBS: [(&str, &str); 8] = [
    (
        "depth = 3\ntolerence = 0.1\n",
        "job.toml, line 2: there is no setting `tolerence`\n  did you mean `tolerance`?",
    ),
    ("depth = \"3 miles\"\n", "job.toml, line 1"),
    (
        "depth = 3\n[layer.cut]\npas = 1\n",
        "job.toml, line 3: there is no setting `pas`\n  did you mean `pass`?",
    ),
    ("depth = \n", "job.toml, line 1"),
    ("depth = 3\nzero = \"table\"\n", "job.toml, line 2"),
    ("depth = 3\nlayers = 7\n", "job.toml, line 2"),
    ("depth = 3\nlayer = 7\n", "job.toml, line 2: `layer` is not a table"),
    ("depth = 3\nspindle = \"fast\"\n", "job.toml, line 2"),
];

#[test]
fn a_wrong_job_file_is_placed_at_its_line() {
    let shop = Shop::new();
    for (text, said) in BAD_JOBS {
        shop.put("job.toml", text);
        let ended =
            shop.run(&["post", "square.csv", "--drawing-unit", "mm", "--job", "job.toml", "-o", "out.nc"]);
        assert_eq!(ended.status, 2, "{text}: {}", ended.err);
        assert!(ended.err.contains(said), "{text} does not say {said}: {}", ended.err);
    }
    assert_eq!(shop.names(), ["job.toml", "square.csv"]);
}

#[test]
fn a_folder_that_takes_no_file_is_status_4() {
    let shop = Shop::new();
    let ended = shop.post("square.csv", &["--report", "no/such/folder/report.json"]);
    assert_eq!(ended.status, 4, "{}", ended.err);
    assert!(ended.err.contains("no/such/folder/report.json"), "{}", ended.err);
    assert!(
        Path::new(&shop.path("square.csv")).exists() && !shop.path("out.nc").exists(),
        "neither is written"
    );
}
