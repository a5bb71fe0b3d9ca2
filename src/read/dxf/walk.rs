//! The walk over a drawing's entities and through its block references: what is seen, where, on which layer.

use super::document::{Block, Document, Entity, true_colour};
use super::geometry::{Drawn, drawn};
use super::groups::Record;
use super::notes::Notes;
use super::placement::{Grid, Placement, point};
use super::text::unescape;
use crate::error::{Error, Kind};
use crate::read::curve::Element;
use crate::sketch::Place;

/// The deepest that blocks may stand in blocks; drawings in use have a handful of levels.
const DEEPEST: usize = 64;

/// The most entities that block references may stand for, which bounds time and memory.
const MOST_PLACED: usize = 500_000;

/// What an entity inherits from the block references it stands in.
#[derive(Clone)]
struct Surroundings<'a> {
    placement: Placement,
    /// The layer of the INSERT, for entities on layer 0; `None` in the drawing itself.
    layer: Option<&'a str>,
    /// The colour of the INSERT, for entities that take their block's.
    colour: String,
    /// The names of the blocks around it, outermost first.
    blocks: Vec<&'a str>,
}

/// A walk under way.
pub(super) struct Walk<'d, 'a> {
    document: &'d Document<'a>,
    placed: usize,
    /// What was found.
    pub(super) elements: Vec<Element>,
    /// What was left out.
    pub(super) notes: Notes,
}

impl<'d, 'a> Walk<'d, 'a> {
    /// Walks the whole drawing.
    pub(super) fn through(document: &'d Document<'a>) -> Result<Self, Error> {
        let mut walk = Self { document, placed: 0, elements: Vec::new(), notes: Notes::default() };
        let placement = Placement::identity();
        let drawing = Surroundings { placement, layer: None, colour: String::new(), blocks: Vec::new() };
        for entity in &document.entities {
            walk.entity(entity, &drawing)?;
        }
        Ok(walk)
    }

    fn entity(&mut self, entity: &Entity<'a>, around: &Surroundings<'a>) -> Result<(), Error> {
        let record = &entity.record;
        let layer = layer_of(record, around);
        if !self.is_seen(record, layer)? {
            return Ok(());
        }
        if record.kind == "INSERT" {
            return self.insert(entity, layer, around);
        }
        match drawn(entity, &around.placement)? {
            Drawn::NotRead(kind) => self.notes.not_read(kind),
            Drawn::Nothing => self.notes.empty(record.kind),
            Drawn::Chain(chain, remark) => {
                if !chain.curves.iter().all(|curve| curve.is_finite()) {
                    return Err(record.error(format!("{} with coordinates beyond all bounds", record.kind)));
                }
                self.notes.remark(remark);
                if self.document.layer(layer).is_some_and(|l| l.unplotted) {
                    self.notes.unplotted(&unescape(layer));
                }
                let layer_name = unescape(layer).into_owned();
                let colour = self.colour(record, layer, around)?;
                self.elements.push(Element {
                    chain,
                    layer: layer_name,
                    colour,
                    place: place(record, around),
                });
            }
        }
        Ok(())
    }

    /// Whether a record is shown; what is not is counted. The contents of an INSERT on a layer that is off
    /// have layers of their own, but a frozen one hides them all.
    fn is_seen(&mut self, record: &Record, layer: &str) -> Result<bool, Error> {
        let hidden =
            self.document.layer(layer).is_some_and(|l| l.frozen || (l.off && record.kind != "INSERT"));
        if record.whole_or(67, 0)? == 1 {
            self.notes.paper();
        } else if record.whole_or(60, 0)? == 1 {
            self.notes.invisible();
        } else if hidden {
            self.notes.hidden(&unescape(layer));
        } else {
            return Ok(true);
        }
        Ok(false)
    }

    /// The colour as the file has it: an index of the DXF palette or `#rrggbb`, the layer's or the block's
    /// where the entity leaves it to them.
    fn colour(&self, record: &Record, layer: &str, around: &Surroundings) -> Result<String, Error> {
        const BY_BLOCK: i64 = 0;
        const BY_LAYER: i64 = 256;
        if let Some(colour) = true_colour(record)? {
            return Ok(colour);
        }
        Ok(match record.whole_or(62, BY_LAYER)? {
            BY_BLOCK => around.colour.clone(),
            BY_LAYER => self.document.layer(layer).map(|l| l.colour.clone()).unwrap_or_default(),
            index => index.to_string(),
        })
    }

    fn insert(
        &mut self,
        entity: &Entity<'a>,
        layer: &'a str,
        around: &Surroundings<'a>,
    ) -> Result<(), Error> {
        let record = &entity.record;
        for attribute in entity.parts {
            self.notes.not_read(attribute.kind.to_owned());
        }
        let name = record.text(2);
        let document = self.document;
        let Some(block) = document.block(name) else {
            self.notes.undefined(&unescape(name));
            return Ok(());
        };
        if is_external(block)? {
            self.notes.external(&unescape(name));
            return Ok(());
        }
        check_nesting(record, name, around)?;
        if record.real_or(41, 1.0)? == 0.0 || record.real_or(42, 1.0)? == 0.0 {
            self.notes.empty("INSERT");
            return Ok(());
        }
        let grid = Grid::new(record, &point(&block.record, 10)?, &around.placement)?;
        let colour = self.colour(record, layer, around)?;
        let blocks = around.blocks.iter().copied().chain([name]).collect();
        let mut inside = Surroundings { placement: around.placement, layer: Some(layer), colour, blocks };
        for row in 0..grid.counts[1] {
            for column in 0..grid.counts[0] {
                inside.placement = grid.cell(column, row);
                self.contents(block, &inside, record)?;
            }
        }
        Ok(())
    }

    fn contents(
        &mut self,
        block: &Block<'a>,
        inside: &Surroundings<'a>,
        insert: &Record,
    ) -> Result<(), Error> {
        self.placed += 1 + block.entities.len();
        if self.placed > MOST_PLACED {
            let what = format!("the block references stand for more than {MOST_PLACED} entities");
            let remedy = "explode or thin out the blocks that repeat most, and export the drawing again";
            return Err(Error::new(Kind::Input, what).on_line(insert.line).remedy(remedy));
        }
        block.entities.iter().try_for_each(|entity| self.entity(entity, inside))
    }
}

/// The layer that decides: the record's own, or for layer 0 in a block that of the INSERT.
fn layer_of<'a>(record: &Record<'a>, around: &Surroundings<'a>) -> &'a str {
    match record.text(8) {
        "" | "0" => around.layer.unwrap_or("0"),
        own => own,
    }
}

/// True for a block that only names another file.
fn is_external(block: &Block) -> Result<bool, Error> {
    const EXTERNAL: i64 = 4;
    Ok(block.record.whole_or(70, 0)? & EXTERNAL != 0 && block.entities.is_empty())
}

fn check_nesting(insert: &Record, name: &str, around: &Surroundings) -> Result<(), Error> {
    let flaw = if around.blocks.iter().any(|outer| outer.eq_ignore_ascii_case(name)) {
        format!("block “{}” contains itself", unescape(name))
    } else if around.blocks.len() >= DEEPEST {
        format!("blocks stand in blocks more than {DEEPEST} deep")
    } else {
        return Ok(());
    };
    let remedy = "explode the block in the drawing program and export again";
    Err(Error::new(Kind::Input, flaw).on_line(insert.line).remedy(remedy))
}

fn place(record: &Record, around: &Surroundings) -> Place {
    let element = match around.blocks.last() {
        None => record.kind.to_owned(),
        Some(block) => format!("{} in block {}", record.kind, unescape(block)),
    };
    Place { line: record.line, element }
}
