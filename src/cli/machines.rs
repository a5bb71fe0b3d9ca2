//! `ribband machines`: the profiles at hand.

use std::path::Path;

use comfy_table::{Table, presets::NOTHING};

use super::print;
use crate::error::{Error, Kind};
use crate::files::Target;
use crate::job;
use crate::machine::{self, Machine};

/// Lists the built-in profiles, or explains the one called `name`; as JSON to `report` where that is asked for.
pub(super) fn machines(name: Option<&str>, report: Option<&Path>, overwrite: bool) -> Result<(), Error> {
    let machines = match name {
        Some(name) => vec![job::machine(Some(name))?],
        None => machine::names().map(Machine::named).collect::<Result<_, _>>()?,
    };
    if let Some(report) = report {
        let json = machine::to_json(&machines).map_err(|why| Error::new(Kind::Output, why.to_string()))?;
        let target = Target::new(Some(report), Path::new(name.unwrap_or_default()), "json");
        target.check(overwrite, &[Path::new(name.unwrap_or_default())])?;
        return target.write(format!("{json:#}\n").as_bytes(), overwrite);
    }
    match machines.as_slice() {
        [one] => print(&machine::explain(one)),
        all => print(&list(all)),
    }
}

fn list(machines: &[Machine]) -> String {
    let mut table = Table::new();
    table.load_style(NOTHING);
    table.set_header(["name", "travel", "what it is"]);
    for machine in machines {
        let unit = machine.unit;
        let [x, y, z] = [machine.travel.x, machine.travel.y, machine.travel.z].map(|mm| mm / unit.mm());
        table.add_row([
            &machine.name,
            &format!("{x:.0} x {y:.0} x {z:.0} {}", unit.symbol()),
            &machine.describes,
        ]);
    }
    format!("{table}\nExplain one of them: ribband machines NAME\n")
}
