//! `$INSUNITS`: what one unit of the drawing is.

/// A length unit of the DXF reference.
pub(super) struct LengthUnit {
    /// Millimetres in one of it.
    pub(super) mm: f64,
    /// What to call it.
    pub(super) name: &'static str,
}

/// The unit of `$INSUNITS` `code`; `None` for 0 (no unit) and for codes that the DXF reference does not list.
///
/// Inch, foot, yard and mile are the international ones of 1959 (25.4 mm an inch), the US survey ones
/// 1200/3937 m a foot; astronomical unit by IAU 2012 resolution B2, parsec by IAU 2015 resolution B2, light
/// year of 365.25 days.
pub(super) fn length_unit(code: i64) -> Option<LengthUnit> {
    const SURVEY_FOOT: f64 = 1_200_000.0 / 3937.0;
    let (mm, name) = match code {
        1 => (25.4, "inch"),
        2 => (304.8, "foot"),
        3 => (1_609_344.0, "mile"),
        4 => (1.0, "mm"),
        5 => (10.0, "cm"),
        6 => (1e3, "m"),
        7 => (1e6, "km"),
        8 => (25.4e-6, "microinch"),
        9 => (0.0254, "mil"),
        10 => (914.4, "yard"),
        11 => (1e-7, "ångström"),
        12 => (1e-6, "nm"),
        13 => (1e-3, "µm"),
        14 => (1e2, "dm"),
        15 => (1e4, "dam"),
        16 => (1e5, "hm"),
        17 => (1e12, "Gm"),
        18 => (1.495_978_707e14, "astronomical unit"),
        19 => (9.460_730_472_580_8e18, "light year"),
        20 => (3.085_677_581_491_367e19, "parsec"),
        21 => (SURVEY_FOOT, "US survey foot"),
        22 => (SURVEY_FOOT / 12.0, "US survey inch"),
        23 => (SURVEY_FOOT * 3.0, "US survey yard"),
        24 => (SURVEY_FOOT * 5280.0, "US survey mile"),
        _ => return None,
    };
    Some(LengthUnit { mm, name })
}
