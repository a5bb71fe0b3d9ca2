//! A comparison on the terminal.

use comfy_table::{CellAlignment, Table, presets::NOTHING};

use super::{Comparison, Figures, Knee, Row};
use crate::num::LengthUnit;
use crate::summary::duration;

const HEAD: [&str; 8] =
    ["tolerance", "motion blocks", "bytes", "time", "cut time", "starved", "deviation", ""];

impl Comparison {
    /// The comparison as a table with the knee marked and told, in the machine's unit, with a line end.
    pub fn table(&self, unit: LengthUnit) -> String {
        let mut table = Table::new();
        table.load_style(NOTHING);
        table.set_header(HEAD);
        for row in &self.rows {
            table.add_row(self.cells(row, unit));
        }
        let drawn = &self.as_drawn;
        table.add_row([
            "as drawn".into(),
            drawn.motion_blocks.to_string(),
            String::new(),
            duration(drawn.time_s),
            duration(drawn.cut_time_s),
            drawn.starved_blocks.to_string(),
        ]);
        for column in table.column_iter_mut().take(HEAD.len() - 1) {
            column.set_cell_alignment(CellAlignment::Right);
        }
        format!("{}\n{}", table, self.told())
    }

    fn cells(&self, row: &Row, unit: LengthUnit) -> Vec<String> {
        let length = |mm: f64| format!("{} {}", significant(mm / unit.mm()), unit.symbol());
        let tolerance = length(row.tolerance_mm);
        let Some(Figures { motion_blocks, bytes, time_s, cut_time_s, starved_blocks, deviation_mm }) =
            row.program
        else {
            return vec![tolerance, "refused".into()];
        };
        let at_knee = |knee: &Knee| knee.tolerance_mm.total_cmp(&row.tolerance_mm).is_eq();
        let marks = [
            ("<- knee", self.knee.as_ref().is_some_and(at_knee)),
            ("over the memory", self.memory_bytes.is_some_and(|memory| bytes > memory as usize)),
        ];
        let marks: Vec<&str> = marks.iter().filter(|(_, holds)| *holds).map(|(mark, _)| *mark).collect();
        vec![
            tolerance,
            motion_blocks.to_string(),
            bytes.to_string(),
            duration(time_s),
            duration(cut_time_s),
            starved_blocks.to_string(),
            deviation_mm.map_or("not found".into(), length),
            marks.join(", "),
        ]
    }

    /// The knee in words.
    pub(super) fn reason(&self) -> String {
        match &self.knee {
            Some(knee) => format!("knee at {} mm: {}", knee.tolerance_mm, knee.reason),
            None => "no knee: the blocks change evenly with the tolerance".into(),
        }
    }

    /// The knee, the trace's own limit, and the refusals in words.
    fn told(&self) -> String {
        let knee = self.reason();
        let support = match self.supports_mm {
            0.0 => String::new(),
            mm => format!("the trace supports a tolerance of {mm} mm: {}\n", self.supports_why),
        };
        let refused = self.rows.iter().filter_map(|row| {
            Some(format!("refused at {} mm: {}\n", row.tolerance_mm, row.refused.as_ref()?))
        });
        format!("{knee}\n{support}{}", refused.collect::<String>())
    }
}

/// Three significant digits.
fn significant(value: f64) -> String {
    let digits = 2 - value.abs().log10().floor().clamp(-9.0, 2.0) as i32;
    format!("{value:.*}", digits.max(0) as usize)
}
