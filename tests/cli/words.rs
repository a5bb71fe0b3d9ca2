//! Commands that only say something, and command lines that are wrong.

use assert_cmd::Command;

fn ribband() -> Command {
    Command::cargo_bin("ribband").expect("the binary is built")
}

#[test]
fn the_cautions_are_numbered_and_folded() {
    let out = ribband().arg("cautions").output().expect("it runs");
    assert!(out.status.success());
    insta::assert_snapshot!(String::from_utf8(out.stdout).expect("plain text"));
}

#[test]
fn completions_and_the_manual_name_every_command() {
    for typed in [&["completions", "bash"][..], &["completions", "fish"], &["manual"]] {
        let out = ribband().args(typed).output().expect("it runs");
        assert!(out.status.success(), "{typed:?}");
        let text = String::from_utf8_lossy(&out.stdout);
        for word in ["post", "measure", "check", "machines", "cautions", "tolerance"] {
            assert!(text.contains(word), "{typed:?} does not name {word}");
        }
    }
}

#[test]
fn a_wrong_command_line_is_status_2_and_help_is_status_0() {
    for typed in [&[][..], &["cut"], &["cautions", "--loud"]] {
        let out = ribband().args(typed).output().expect("it runs");
        assert_eq!(out.status.code(), Some(2), "{typed:?}");
        assert!(out.stdout.is_empty(), "{typed:?}");
    }
    for typed in ["--help", "--version"] {
        assert_eq!(ribband().arg(typed).output().expect("it runs").status.code(), Some(0), "{typed}");
    }
}
