//! Job files: the same settings in TOML, and what single layers want otherwise.

use std::collections::BTreeMap;

use clap::Args;
use serde::{Deserialize, Serialize};

use super::settings::{Entry, Held, Settings};
use crate::error::{Error, Kind};
use crate::num::{Feed, Length};

/// A job file as it stands: settings for the whole job, and those of single layers.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct JobFile {
    /// Settings for every contour.
    pub settings: Settings,
    /// What the contours of a layer want otherwise, by the layer's name.
    pub layers: BTreeMap<String, LayerSettings>,
}

/// The settings that may differ from layer to layer.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, deny_unknown_fields, rename_all = "kebab-case")]
pub struct LayerSettings {
    /// Leave the layer out.
    #[arg(long)]
    pub skip: bool,
    /// How deep to cut.
    #[arg(long)]
    pub depth: Option<Length>,
    /// Deepest single pass.
    #[arg(long)]
    pub pass: Option<Length>,
    /// Feed along the contour.
    #[arg(long)]
    pub feed: Option<Feed>,
    /// Feed straight down.
    #[arg(long)]
    pub plunge: Option<Feed>,
    /// How the cutter goes down.
    #[arg(long)]
    pub entry: Option<Entry>,
    /// How a part is held that the cut frees.
    #[arg(long)]
    pub held: Option<Held>,
}

impl JobFile {
    /// The job file whose text is `text`; `file` is its name for messages.
    ///
    /// # Errors
    /// [`Kind::Settings`] with the line when it is not TOML, or a key or value is not understood.
    pub fn parse(file: &str, text: &str) -> Result<Self, Error> {
        let mut whole: toml::Table = toml::from_str(text).map_err(|why| placed(file, text, &why))?;
        let layers = whole.remove("layer");
        known_keys::<Settings>(file, text, &whole, &["layer"])?;
        let settings = typed(file, text, whole)?;
        let mut entries = BTreeMap::new();
        if let Some(layers) = layers {
            let toml::Value::Table(layers) = layers else {
                return Err(wrong(
                    file,
                    text,
                    "layer",
                    "`layer` is not a table",
                    "write [layer.NAME] with keys below it",
                ));
            };
            for (name, entry) in layers {
                let toml::Value::Table(entry) = entry else {
                    return Err(wrong(
                        file,
                        text,
                        &name,
                        "a layer's entry is not a table",
                        "write [layer.NAME]",
                    ));
                };
                known_keys::<LayerSettings>(file, text, &entry, &[])?;
                entries.insert(name, typed(file, text, entry)?);
            }
        }
        Ok(Self { settings, layers: entries })
    }
}

/// The table's values as settings, each error placed at its key.
fn typed<T: Default + serde::de::DeserializeOwned>(
    file: &str,
    text: &str,
    table: toml::Table,
) -> Result<T, Error> {
    for (key, value) in &table {
        let alone = toml::Table::from_iter([(key.clone(), value.clone())]);
        if let Err(why) = alone.try_into::<T>() {
            let what = format!("`{key}`: {}", why.message().trim());
            return Err(wrong(file, text, key, &what, ""));
        }
    }
    table.try_into().map_err(|why| placed(file, text, &why))
}

/// Refuses a key that the settings `T` do not have, and names the nearest that they have.
fn known_keys<T: Args>(file: &str, text: &str, table: &toml::Table, also: &[&str]) -> Result<(), Error> {
    let command = T::augment_args(clap::Command::new("settings"));
    let known: Vec<String> = command
        .get_arguments()
        .filter_map(|arg| arg.get_long())
        .chain(also.iter().copied())
        .map(str::to_owned)
        .collect();
    let Some(key) = table.keys().find(|key| !known.contains(key)) else { return Ok(()) };
    let remedy = match nearest(key, &known) {
        Some(meant) => format!("did you mean `{meant}`?"),
        None => format!("the keys are: {}", known.join(", ")),
    };
    Err(wrong(file, text, key, &format!("there is no setting `{key}`"), &remedy))
}

/// The candidate that reads most like `word`, if any does.
fn nearest<'a>(word: &str, candidates: &'a [String]) -> Option<&'a String> {
    let likeness = |candidate: &&String| strsim::jaro_winkler(word, candidate);
    candidates.iter().max_by(|a, b| likeness(a).total_cmp(&likeness(b))).filter(|best| likeness(best) > 0.8)
}

/// An error about `key`, on the first line that sets it.
fn wrong(file: &str, text: &str, key: &str, what: &str, remedy: &str) -> Error {
    let sets = |line: &str| {
        let line = line.trim_start().trim_start_matches(['[', '"', '\'']);
        line.strip_prefix("layer.").unwrap_or(line).trim_start_matches(['"', '\'']).starts_with(key)
    };
    let line = text.lines().position(sets).map_or(0, |index| index + 1);
    Error::new(Kind::Settings, what).in_file(file).on_line(line).remedy(remedy)
}

/// The TOML reader's own error, on its line.
fn placed(file: &str, text: &str, why: &toml::de::Error) -> Error {
    let line = why.span().map_or(0, |span| text[..span.start].matches('\n').count() + 1);
    Error::new(Kind::Settings, why.message().lines().collect::<Vec<_>>().join(" "))
        .in_file(file)
        .on_line(line)
}
