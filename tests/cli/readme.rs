//! What the README shows of the summary is what the command beside it prints.

use std::fs;
use std::path::Path;

use assert_cmd::Command;

const COMMAND: &str = "cargo run --release -- post fixtures/demo/sign.dxf --depth 3mm -o sign.nc";
const OPENS: &str = "```text\n";

/// Kept by `RIBBAND_WRITE_README=1 cargo test --test cli readme`.
#[test]
fn the_sample_summary_is_printed_by_the_command_beside_it() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let readme = fs::read_to_string(root.join("README.md")).expect("the README");
    let folder = tempfile::tempdir().expect("a folder");
    let mut command = Command::cargo_bin("ribband").expect("the binary is built");
    let drawing = root.join("fixtures/demo/sign.dxf");
    let typed = ["--depth", "3mm", "-o", "sign.nc"];
    let out = command.current_dir(&folder).arg("post").arg(drawing).args(typed).output().expect("it runs");
    let printed = String::from_utf8(out.stdout).expect("text");
    let (summary, _) = printed.split_once("\nCautions\n").expect("the cautions follow");

    let begins = readme.find(OPENS).expect("a sample") + OPENS.len();
    let ends = begins + readme[begins..].find("```").expect("its end");
    assert!(
        readme[ends..].starts_with(&format!("```\n\n(`{COMMAND}`, ")),
        "the command stands below the sample"
    );
    if std::env::var_os("RIBBAND_WRITE_README").is_some() {
        let renewed = format!("{}{summary}{}", &readme[..begins], &readme[ends..]);
        fs::write(root.join("README.md"), renewed).expect("the README can be written");
        return;
    }
    assert_eq!(&readme[begins..ends], summary, "the README's sample is out of date");
}
