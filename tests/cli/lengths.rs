//! Lengths and feeds as typed.

use proptest::prelude::*;
use ribband::job::{Job, JobFile, Settings};
use ribband::num::{Feed, Length, LengthUnit};

/// The text as mm on a machine that works in `unit`; `Err` when it is no length, `Ok(None)` when the unit is missing.
fn mm(text: &str, unit: LengthUnit) -> Result<Option<f64>, String> {
    text.parse::<Length>().map(|length| length.mm(unit))
}

#[test]
fn lengths_with_a_unit_mean_the_same_on_every_machine() {
    let rows = [
        ("0.1mm", 0.1),
        ("0.1 mm", 0.1),
        ("0.004in", 0.1016),
        ("3/4in", 19.05),
        ("1 1/2in", 38.1),
        ("-1 1/2in", -38.1),
        (".5in", 12.7),
        ("+2.mm", 2.0),
        ("  6mm ", 6.0),
        ("0in", 0.0),
    ];
    for (text, expected) in rows {
        for unit in [LengthUnit::Mm, LengthUnit::Inch] {
            let got = mm(text, unit).expect(text).expect(text);
            assert!(
                (got - expected).abs() <= 4.0 * f64::EPSILON * expected.abs(),
                "{text}: {got} for {expected}"
            );
        }
    }
}

#[test]
fn a_bare_number_is_mm_on_a_machine_in_mm_and_refused_on_one_in_inches() {
    for text in ["6", "1/2", "1 1/2", "0.25"] {
        assert!(mm(text, LengthUnit::Mm).expect(text).is_some(), "{text} on a machine in mm");
        assert_eq!(mm(text, LengthUnit::Inch), Ok(None), "{text} on a machine in inches");
    }
    assert_eq!(mm("0", LengthUnit::Inch), Ok(Some(0.0)), "nothing is nothing in any unit");
}

#[test]
fn what_is_no_length_is_said_to_be_none() {
    let rows = [
        "",
        " ",
        "mm",
        "nan",
        "inf",
        "1e400",
        "1e3",
        "1.2.3mm",
        "0.1m",
        "0.1cm",
        "0,1mm",
        "1/0in",
        "1/0",
        "0x10",
        "1 2mm",
        "1 1/2 1/4in",
        "--1",
        "6mm6",
        "3/4/5in",
        "½in",
    ];
    for text in rows {
        let why = mm(text, LengthUnit::Mm).expect_err(text);
        assert!(why.contains("3/4in"), "{text}: {why}");
    }
}

#[test]
fn feeds_take_their_own_units() {
    let feed = |text: &str, unit| text.parse::<Feed>().map(|feed| feed.mm_min(unit));
    assert_eq!(feed("1800mm/min", LengthUnit::Inch), Ok(Some(1800.0)), "mm/min");
    assert_eq!(feed("1800", LengthUnit::Mm), Ok(Some(1800.0)), "bare");
    assert_eq!(feed("1800", LengthUnit::Inch), Ok(None), "bare on a machine in inches");
    assert_eq!(feed("100in/min", LengthUnit::Mm), Ok(Some(2540.0)), "in/min");
    for text in ["1800mm", "70in", "1800 rpm", "-", "1800mm/s"] {
        assert!(feed(text, LengthUnit::Mm).is_err(), "{text} is no feed");
    }
}

proptest! {
    /// What a length prints is read back as the same length.
    #[test]
    fn a_length_prints_what_it_reads(mm in -1e6_f64..1e6) {
        let length = Length::from_mm(mm);
        prop_assert_eq!(length.to_string().parse::<Length>(), Ok(length));
    }
}

/// Found by fuzzing: a third of 1 mm/min was rounded to a plunge of nothing.
#[test]
fn a_crawling_feed_keeps_a_plunge() {
    let file = JobFile::parse("job.toml", "depth = \"6mm\"\nfeed = 1\n").expect("a job file");
    let job = Job::new(&Settings::default(), &file).expect("a job");
    assert!((job.cutting.plunge - 1.0 / 3.0).abs() < 1e-12, "plunge {}", job.cutting.plunge);
}
