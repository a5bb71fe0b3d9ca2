//! Output files: whole or not at all, and never over something else unasked.

use std::fs;
use std::path::Path;

use ribband::error::Kind;
use ribband::files::Target;

fn names(folder: &Path) -> Vec<String> {
    let entries = fs::read_dir(folder).expect("the folder can be listed");
    entries.map(|entry| entry.expect("an entry").file_name().to_string_lossy().into_owned()).collect()
}

#[test]
fn a_file_is_written_whole_and_leaves_nothing_beside_it() {
    let folder = tempfile::tempdir().expect("a folder");
    let target = Target::File(folder.path().join("out.nc"));
    target.write(b"one", false).expect("a new file");
    assert_eq!(fs::read(folder.path().join("out.nc")).expect("the file"), b"one");
    assert_eq!(names(folder.path()), ["out.nc"], "only the output");
}

#[test]
fn an_existing_file_is_replaced_only_when_allowed() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("out.nc");
    fs::write(&path, "before").expect("a file");
    let target = Target::File(path.clone());
    for refused in [target.check(false, &[]), target.write(b"after", false)] {
        assert_eq!(refused.expect_err("refused").kind, Kind::Output);
        assert_eq!(fs::read(&path).expect("the file"), b"before");
    }
    target.check(true, &[]).expect("allowed");
    target.write(b"after", true).expect("allowed");
    assert_eq!(fs::read(&path).expect("the file"), b"after");
    assert_eq!(names(folder.path()), ["out.nc"], "only the output");
}

#[test]
fn an_output_never_replaces_its_input() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("part.csv");
    fs::write(&path, "0,0").expect("a file");
    let roundabout = folder.path().join(".").join("part.csv");
    let refused = Target::File(path).check(true, &[&roundabout]).expect_err("refused");
    assert!(refused.what.contains("its own input"), "{refused}");
}

#[test]
fn a_missing_folder_and_a_folder_as_output_are_told_before_any_work() {
    let folder = tempfile::tempdir().expect("a folder");
    let missing =
        Target::File(folder.path().join("no").join("out.nc")).check(true, &[]).expect_err("missing");
    assert!(missing.what.contains("does not exist"), "{missing}");
    let itself = Target::File(folder.path().to_owned()).check(true, &[]).expect_err("a folder");
    assert!(itself.what.contains("is a folder"), "{itself}");
}

#[test]
fn without_a_name_the_program_stands_beside_the_drawing() {
    let beside = Target::new(None, Path::new("shop/sign.v2.svg"), "nc");
    assert_eq!(beside, Target::File("shop/sign.v2.nc".into()));
    assert_eq!(Target::new(Some(Path::new("-")), Path::new("sign.svg"), "nc"), Target::Stdout);
}
