//! Every bad SVG and point list of `fixtures/bad`, with the whole message a user gets.

use std::path::Path;

use ribband::read::{Scale, read};

#[test]
fn each_bad_file_gets_one_clear_message() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/bad");
    let mut names: Vec<String> = std::fs::read_dir(&folder)
        .expect("the folder is there")
        .map(|entry| entry.expect("an entry").file_name().into_string().expect("a plain name"))
        .filter(|name| name.starts_with("svg-") || name.starts_with("points-"))
        .collect();
    names.sort_unstable();
    let messages: Vec<String> = names.iter().map(|name| message(name, &folder.join(name))).collect();
    insta::assert_snapshot!(messages.join("\n\n"));
}

/// The exit status and the message.
fn message(name: &str, file: &Path) -> String {
    let bytes = std::fs::read(file).expect("the file is there");
    // Only what lacks a unit is refused for it: every other file breaks before its scale matters.
    match read(name, &bytes, &Scale::default()) {
        Ok(sketch) => panic!("{name} was read: {sketch:?}"),
        Err(error) => format!("[{}] {error}", error.exit_status()),
    }
}
