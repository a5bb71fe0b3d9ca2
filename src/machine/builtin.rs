//! The profiles that come with the program.

use super::Machine;
use crate::error::{Error, Kind};

/// Name and text of each built-in profile, the default first.
const PROFILES: [(&str, &str); 5] = [
    ("shop-router", include_str!("../../machine-profiles/shop-router.toml")),
    ("benchtop-router", include_str!("../../machine-profiles/benchtop-router.toml")),
    ("inch-gantry", include_str!("../../machine-profiles/inch-gantry.toml")),
    ("old-controller", include_str!("../../machine-profiles/old-controller.toml")),
    ("fast-router", include_str!("../../machine-profiles/fast-router.toml")),
];

/// The names of the built-in profiles, the default first.
pub fn names() -> impl Iterator<Item = &'static str> {
    PROFILES.iter().map(|(name, _)| *name)
}

/// The text of the built-in profile called `name`, a template for one's own.
pub fn built_in(name: &str) -> Option<&'static str> {
    PROFILES.iter().find(|(known, _)| *known == name).map(|(_, text)| *text)
}

/// The built-in profile called `name`.
pub(super) fn named(name: &str) -> Result<Machine, Error> {
    let Some(text) = built_in(name) else { return Err(unknown(name)) };
    Machine::from_toml(text).map_err(|error| error.in_file(name))
}

/// The error for a name that no profile has.
fn unknown(name: &str) -> Error {
    let near = |known: &&str| strsim::damerau_levenshtein(known, name);
    let nearest = names().min_by_key(near).filter(|known| near(known) <= 3);
    let meant = nearest.map_or_else(String::new, |n| format!("did you mean {n}? "));
    let all: Vec<_> = names().collect();
    Error::new(Kind::Settings, format!("there is no machine profile \"{name}\""))
        .remedy(format!("{meant}Built in: {}; or name a profile file", all.join(", ")))
}
