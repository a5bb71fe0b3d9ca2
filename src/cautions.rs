//! What no program can see to: the cautions for the person at the machine, in our own words.
//!
//! Drawn from the hazards that HSE Woodworking Information Sheets 22 and 23, OSHA 29 CFR 1910.147, .212 and .213,
//! CCOHS' woodworking tips and WorkSafe NZ's page on woodworking CNC machines describe.

/// The cautions, in the order in which a job goes: before, at the start, while it runs, afterwards.
pub const CAUTIONS: [&str; 13] = [
    "Ribband only works out where the cutter goes. Whether the job is safe is for you and your machine's manual to \
     decide; the law where you work and the rules of your shop come first.",
    "Look at the extents in the summary and hold them against the table, the stock and every clamp and screw.",
    "Hold the work so that it can neither lift nor slide, to the end of the last pass, which may free the part: \
     vacuum, screws outside the path, or tabs.",
    "Fit a sharp, sound cutter of the diameter stated, gripped as deep as its maker says. Never run it above the \
     speed marked on it or given by its maker.",
    "Set X, Y and Z zero where the program says they are, check them and the units a second time, and see that the \
     clearance height clears every clamp.",
    "Cut air first: spindle off or zero set well above the stock, feed override low, one hand at the stop.",
    "Know where the emergency stop is and that it works. Nothing in a program can stop the machine for you.",
    "Wear eye, ear and dust protection. Nothing loose near the cutter: no gloves, sleeves, hair, cords or rings.",
    "Keep hands, tools and other people outside the reach of gantry and cutter; guards on, doors shut.",
    "Stay with the machine for the whole run. Stop it at smoke, a smell, or a change in its sound or movement.",
    "Draw off dust and chips. A dull cutter or a slow feed can start a smoulder that breaks out later in the bag: \
     keep an extinguisher at hand and look into the bin afterwards.",
    "Cut the power before you touch cutter, collet or spindle. After a stop or a power cut do not carry on blindly: \
     raise the cutter, find zero again.",
    "Know what you cut: resins, coatings, treated timber, PVC and metals each need their own care.",
];

/// The cautions as a numbered list, folded at 100 columns.
pub fn list() -> String {
    CAUTIONS.iter().enumerate().map(|(i, caution)| fold(&format!("{:2}. {caution}", i + 1), 100, 4)).collect()
}

/// `text` folded at `width` columns, each further line indented by `indent`, with a line end.
fn fold(text: &str, width: usize, indent: usize) -> String {
    let mut folded = String::new();
    let mut column = 0;
    for word in text.split_inclusive(' ') {
        if column + word.trim_end().chars().count() > width {
            folded.truncate(folded.trim_end().len());
            folded.push('\n');
            folded.push_str(&" ".repeat(indent));
            column = indent;
        }
        folded.push_str(word);
        column += word.chars().count();
    }
    folded.push('\n');
    folded
}

/// The cautions that every program carries in its opening comments, in its plain characters.
pub const SHORT: [&str; 3] = [
    "hold the work fast, set and check all zeros, cut air first",
    "eyes, ears and lungs protected, hands clear, one at the stop",
    "the machine's manual and the shop's rules come first",
];
