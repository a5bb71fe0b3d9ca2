//! Everything that is built in or needed to build and test is under a licence of this list.

use std::process::Command;

use serde_json::Value;

/// Licences that ask for no more than that their text goes along (SPDX names).
const ALLOWED: [&str; 9] = [
    "MIT",
    "MIT-0",
    "Apache-2.0",
    "Apache-2.0 WITH LLVM-exception",
    "BSD-2-Clause",
    "BSD-3-Clause",
    "ISC",
    "Zlib",
    "Unicode-3.0",
];

/// True when one choice of the licence expression is allowed whole. Brackets stand around choices only.
fn is_allowed(expression: &str) -> bool {
    let choice = |choices: &str| {
        let choices = choices.trim().trim_start_matches('(').trim_end_matches(')').replace('/', " OR ");
        choices.split(" OR ").any(|name| ALLOWED.contains(&name.trim()))
    };
    let bracketed = expression.contains('(');
    if bracketed {
        return expression.split(" AND ").all(choice);
    }
    let all_of = |choice: &str| choice.split(" AND ").all(|name| ALLOWED.contains(&name.trim()));
    expression.replace('/', " OR ").split(" OR ").any(all_of)
}

fn cargo(arguments: &[&str]) -> Vec<u8> {
    let out = Command::new(env!("CARGO")).args(arguments).current_dir(env!("CARGO_MANIFEST_DIR")).output();
    let out = out.expect("cargo runs");
    assert!(out.status.success(), "{}", String::from_utf8_lossy(&out.stderr));
    out.stdout
}

/// The system that this runs on, as cargo names it: crates for others need not be at hand.
fn host() -> String {
    let version = String::from_utf8(cargo(&["-vV"])).expect("UTF-8");
    version.lines().find_map(|line| line.strip_prefix("host: ")).expect("a host").to_owned()
}

#[test]
fn every_dependency_is_under_an_allowed_licence() {
    let metadata =
        ["metadata", "--offline", "--locked", "--format-version", "1", "--filter-platform", &host()];
    let metadata: Value = serde_json::from_slice(&cargo(&metadata)).expect("JSON");
    let packages = metadata["packages"].as_array().expect("a list");
    assert!(packages.len() > 50, "{} packages", packages.len());
    let licence = |package: &Value| package["license"].as_str().unwrap_or("none stated").to_owned();
    let refused: Vec<String> = packages
        .iter()
        .filter(|package| !is_allowed(&licence(package)))
        .map(|package| format!("{}: {}", package["name"], licence(package)))
        .collect();
    assert!(refused.is_empty(), "{refused:?}");
}

#[test]
fn licence_expressions_are_understood() {
    for good in
        ["MIT", "MIT OR GPL-3.0", "GPL-2.0/MIT", "(MIT OR X) AND Unicode-3.0", "MIT AND ISC", "X / ISC"]
    {
        assert!(is_allowed(good), "{good}");
    }
    for bad in
        ["GPL-3.0", "MIT AND GPL-3.0", "(MIT OR X) AND GPL-3.0", "none stated", "", "LGPL-2.1 OR MPL-2.0"]
    {
        assert!(!is_allowed(bad), "{bad}");
    }
}
