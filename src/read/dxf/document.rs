//! The sections of a DXF file: header variables, layers, blocks, entities.

use std::collections::HashMap;

use super::groups::{Group, Record};
use super::text::unescape;
use crate::error::Error;

/// A DXF file, its geometry not yet looked at.
#[derive(Debug, Default)]
pub(super) struct Document<'a> {
    header: HashMap<&'a str, &'a Group<'a>>,
    layers: HashMap<String, Layer>,
    blocks: HashMap<String, Block<'a>>,
    /// What stands in the drawing itself.
    pub(super) entities: Vec<Entity<'a>>,
    /// False when the end-of-file mark is missing.
    pub(super) ended: bool,
}

/// A layer's state.
#[derive(Clone, Debug, Default)]
pub(super) struct Layer {
    /// Not shown, and what is inserted on it is not shown either.
    pub(super) frozen: bool,
    /// Not shown; what is inserted on it is, where its own layer is on.
    pub(super) off: bool,
    /// Shown on the screen, but left out of a plot.
    pub(super) unplotted: bool,
    /// Its colour: an index of the DXF palette, or `#rrggbb`.
    pub(super) colour: String,
}

/// A block: entities that are drawn where an INSERT says so.
#[derive(Debug)]
pub(super) struct Block<'a> {
    /// Its BLOCK record, with the base point.
    pub(super) record: Record<'a>,
    /// Its contents.
    pub(super) entities: Vec<Entity<'a>>,
}

/// One entity with the records that belong to it: VERTEX to a POLYLINE, ATTRIB to an INSERT.
#[derive(Clone, Copy, Debug)]
pub(super) struct Entity<'a> {
    /// The entity's own record.
    pub(super) record: Record<'a>,
    /// What belongs to it.
    pub(super) parts: &'a [Record<'a>],
}

/// Layer and block names compare without regard to case.
fn key(name: &str) -> String {
    unescape(name).to_lowercase()
}

impl<'a> Document<'a> {
    /// The document that `records` tell.
    pub(super) fn new(records: &'a [Record<'a>]) -> Result<Self, Error> {
        let mut document = Self::default();
        let mut rest = records;
        while let Some((first, after)) = rest.split_first() {
            match first.kind {
                "SECTION" => {
                    let end =
                        after.iter().position(|r| r.kind == "ENDSEC").ok_or_else(|| cut_short(first))?;
                    document.section(first, &after[..end])?;
                    rest = &after[end + 1..];
                }
                "EOF" => {
                    document.ended = true;
                    return Ok(document);
                }
                other => return Err(first.error(format!("expected SECTION or EOF, found “{other}”"))),
            }
        }
        Ok(document)
    }

    fn section(&mut self, first: &Record<'a>, contents: &'a [Record<'a>]) -> Result<(), Error> {
        match first.text(2) {
            "HEADER" => self.header.extend(variables(first.groups)),
            "TABLES" => self.layers.extend(layers(contents)?),
            "BLOCKS" => self.blocks.extend(blocks(contents)?),
            "ENTITIES" => self.entities.extend(entities(contents)),
            _ => {}
        }
        Ok(())
    }

    /// The value of a header variable; `None` when the file does not set it.
    pub(super) fn variable(&self, name: &str) -> Option<&'a Group<'a>> {
        self.header.get(name).copied()
    }

    /// The layer called `name`; one that no table lists is on and thawed.
    pub(super) fn layer(&self, name: &str) -> Option<&Layer> {
        self.layers.get(&key(name))
    }

    /// The block called `name`.
    pub(super) fn block(&self, name: &str) -> Option<&Block<'a>> {
        self.blocks.get(&key(name))
    }
}

fn cut_short(section: &Record) -> Error {
    section
        .error(format!("section {} has no end: the file is cut short", section.text(2)))
        .remedy("copy or export the drawing again; a program cut from half a drawing is half a part")
}

/// The first value of each header variable (code 9).
fn variables<'a>(groups: &'a [Group<'a>]) -> impl Iterator<Item = (&'a str, &'a Group<'a>)> {
    groups.windows(2).filter(|pair| pair[0].code == 9).map(|pair| (pair[0].value.trim(), &pair[1]))
}

/// The layers of a TABLES section.
fn layers(records: &[Record]) -> Result<HashMap<String, Layer>, Error> {
    let listed = records.iter().filter(|r| r.kind == "LAYER");
    listed.map(|r| Ok((key(r.text(2)), layer(r)?))).collect()
}

fn layer(record: &Record) -> Result<Layer, Error> {
    let colour = record.whole_or(62, 7)?;
    Ok(Layer {
        frozen: record.whole_or(70, 0)? & 1 != 0,
        off: colour < 0,
        unplotted: record.whole_or(290, 1)? == 0,
        colour: true_colour(record)?.unwrap_or_else(|| colour.abs().to_string()),
    })
}

/// The colour of group 420 as `#rrggbb`.
pub(super) fn true_colour(record: &Record) -> Result<Option<String>, Error> {
    let colour = record.first(420).map(Group::whole).transpose()?;
    Ok(colour.map(|rgb| format!("#{:06x}", rgb & 0xff_ffff)))
}

/// The blocks of a BLOCKS section.
fn blocks<'a>(records: &'a [Record<'a>]) -> Result<HashMap<String, Block<'a>>, Error> {
    let mut blocks = HashMap::new();
    let mut rest = records;
    while let Some((first, after)) = rest.split_first() {
        if first.kind != "BLOCK" {
            return Err(first.error(format!("expected BLOCK, found “{}”", first.kind)));
        }
        let end = after.iter().position(|r| r.kind == "ENDBLK").ok_or_else(|| no_block_end(first))?;
        let block = Block { record: *first, entities: entities(&after[..end]) };
        blocks.insert(key(first.text(2)), block);
        rest = &after[end + 1..];
    }
    Ok(blocks)
}

fn no_block_end(block: &Record) -> Error {
    block.error(format!("block “{}” has no end (ENDBLK)", block.text(2)))
}

/// The entities of `records`, each with the records that belong to it.
fn entities<'a>(records: &'a [Record<'a>]) -> Vec<Entity<'a>> {
    let mut entities = Vec::with_capacity(records.len());
    let mut rest = records;
    while let Some((first, after)) = rest.split_first() {
        let part = match first.kind {
            "POLYLINE" => "VERTEX",
            "INSERT" => "ATTRIB",
            _ => "",
        };
        let count = after.iter().take_while(|r| r.kind == part).count();
        entities.push(Entity { record: *first, parts: &after[..count] });
        rest = &after[count..];
        if let (false, Some(("SEQEND", after))) =
            (part.is_empty(), rest.split_first().map(|(r, a)| (r.kind, a)))
        {
            rest = after;
        }
    }
    entities
}
