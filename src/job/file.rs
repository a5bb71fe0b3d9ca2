//! Job files: the same settings in TOML, and what single layers and colours want otherwise.

use std::collections::BTreeMap;

use clap::Args;
use serde::{Deserialize, Serialize};

use super::settings::Settings;
use super::wishes::CutArgs;
use crate::error::{Error, Kind};

/// A job file as it stands: settings for the whole job, and those of single layers and colours of the drawing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct JobFile {
    /// Settings for every contour.
    pub settings: Settings,
    /// What the contours of a layer want otherwise, by the layer's name.
    pub layers: BTreeMap<String, LayerSettings>,
    /// What the contours of a colour want otherwise that are on none of these layers, by the colour as the drawing has it.
    pub colours: BTreeMap<String, LayerSettings>,
}

/// The settings that may differ from layer to layer, or from colour to colour.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct LayerSettings {
    /// Leave the layer out.
    #[arg(long)]
    #[serde(skip_serializing_if = "std::ops::Not::not")]
    pub skip: bool,
    /// How its contours are cut.
    #[command(flatten)]
    #[serde(flatten)]
    pub cut: CutArgs,
}

impl JobFile {
    /// The job file whose text is `text`; `file` is its name for messages.
    ///
    /// # Errors
    /// [`Kind::Settings`] with the line when it is not TOML, or a key or value is not understood.
    pub fn parse(file: &str, text: &str) -> Result<Self, Error> {
        let mut whole: toml::Table = toml::from_str(text).map_err(|why| placed(file, text, &why))?;
        let (layers, colours) = (whole.remove("layer"), whole.remove("colour"));
        let top = Part { file, text, after: 0 };
        top.known_keys::<Settings>(&whole, &["layer", "colour"])?;
        let settings = top.typed(whole)?;
        let colours = top.entries("colour", colours)?;
        let colours = colours.into_iter().map(|(name, entry)| (same_colour(&name), entry)).collect();
        Ok(Self { settings, layers: top.entries("layer", layers)?, colours })
    }

    /// The text of a job file that asks for what `typed` and this file together ask for: running it for `drawing` does
    /// the same again.
    ///
    /// # Errors
    /// [`Kind::Output`] when it cannot be written as TOML.
    pub fn with(&self, typed: &Settings, drawing: &str) -> Result<String, Error> {
        let cannot =
            |why: toml::ser::Error| Error::new(Kind::Output, format!("the job cannot be saved: {why}"));
        let all = typed.clone().or(self.settings.clone());
        let mut whole = toml::Table::try_from(all).map_err(cannot)?;
        for (kind, entries) in [("layer", &self.layers), ("colour", &self.colours)] {
            let mut table = toml::Table::new();
            for (name, entry) in entries {
                // What is typed wins over a layer, and so must do the same in the file.
                let entry = LayerSettings { cut: typed.cut.clone().or(entry.cut.clone()), ..entry.clone() };
                table.insert(name.clone(), toml::Value::try_from(entry).map_err(cannot)?);
            }
            if !table.is_empty() {
                whole.insert(kind.into(), toml::Value::Table(table));
            }
        }
        let settings = toml::to_string(&whole).map_err(cannot)?;
        let drawing = drawing.replace(char::is_control, " ");
        Ok(format!("# the settings of: ribband post {drawing}\n{settings}"))
    }
}

/// A colour in one form, however the drawing or the job file writes it: small letters, six digits for three.
pub fn same_colour(colour: &str) -> String {
    let small = colour.trim().to_lowercase();
    match small.strip_prefix('#') {
        Some(digits) if digits.chars().count() == 3 => {
            let twice: String = digits.chars().flat_map(|digit| [digit, digit]).collect();
            format!("#{twice}")
        }
        _ => small,
    }
}

/// The number of lines down to the header of an entry; none where it has no header of its own.
fn header(text: &str, kind: &str, entry: &str) -> usize {
    let heads = |line: &str| {
        let inner = line.trim().strip_prefix('[').and_then(|rest| rest.split(']').next());
        let name = inner.and_then(|inner| inner.trim().strip_prefix(kind)?.strip_prefix('.'));
        name.is_some_and(|name| name.trim().trim_matches(['"', '\'']) == entry)
    };
    text.lines().position(heads).map_or(0, |index| index + 1)
}

/// A part of a job file: what stands below one of its headers.
#[derive(Clone, Copy)]
struct Part<'a> {
    file: &'a str,
    text: &'a str,
    /// The lines before it.
    after: usize,
}

impl Part<'_> {
    /// The entries of one kind, by their names.
    fn entries(
        self,
        kind: &str,
        table: Option<toml::Value>,
    ) -> Result<BTreeMap<String, LayerSettings>, Error> {
        let Some(table) = table else { return Ok(BTreeMap::new()) };
        let remedy = format!("write [{kind}.NAME] with keys below it");
        let toml::Value::Table(table) = table else {
            return Err(self.wrong(kind, &format!("`{kind}` is not a table"), &remedy));
        };
        let mut entries = BTreeMap::new();
        for (name, entry) in table {
            let part = Part { after: header(self.text, kind, &name), ..self };
            let toml::Value::Table(entry) = entry else {
                return Err(self.wrong(&name, &format!("the entry of a {kind} is not a table"), &remedy));
            };
            part.known_keys::<LayerSettings>(&entry, &[])?;
            entries.insert(name, part.typed(entry)?);
        }
        Ok(entries)
    }

    /// The table's values as settings, each error placed at its key.
    fn typed<T: Default + serde::de::DeserializeOwned>(self, table: toml::Table) -> Result<T, Error> {
        for (key, value) in &table {
            let alone = toml::Table::from_iter([(key.clone(), value.clone())]);
            if let Err(why) = alone.try_into::<T>() {
                let what = format!("`{key}`: {}", why.message().trim());
                return Err(self.wrong(key, &what, ""));
            }
        }
        table.try_into().map_err(|why| placed(self.file, self.text, &why))
    }

    /// Refuses a key that the settings `T` do not have, and names the nearest that they have.
    fn known_keys<T: Args>(self, table: &toml::Table, also: &[&str]) -> Result<(), Error> {
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
        Err(self.wrong(key, &format!("there is no setting `{key}`"), &remedy))
    }

    /// An error about `key`, on the first line of the part that sets it.
    fn wrong(self, key: &str, what: &str, remedy: &str) -> Error {
        let sets = |line: &str| {
            let line = line.trim_start().trim_start_matches(['[', '"', '\'']);
            let line = line.strip_prefix("layer.").or(line.strip_prefix("colour.")).unwrap_or(line);
            line.trim_start_matches(['"', '\'']).starts_with(key)
        };
        let line =
            self.text.lines().skip(self.after).position(sets).map_or(0, |index| self.after + index + 1);
        Error::new(Kind::Settings, what).in_file(self.file).on_line(line).remedy(remedy)
    }
}

/// The candidate that reads most like `word`, if any does.
fn nearest<'a>(word: &str, candidates: &'a [String]) -> Option<&'a String> {
    let likeness = |candidate: &&String| strsim::jaro_winkler(word, candidate);
    candidates.iter().max_by(|a, b| likeness(a).total_cmp(&likeness(b))).filter(|best| likeness(best) > 0.8)
}

/// The TOML reader's own error, on its line.
fn placed(file: &str, text: &str, why: &toml::de::Error) -> Error {
    let line = why.span().map_or(0, |span| text[..span.start].matches('\n').count() + 1);
    Error::new(Kind::Settings, why.message().lines().collect::<Vec<_>>().join(" "))
        .in_file(file)
        .on_line(line)
}
