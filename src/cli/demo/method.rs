//! The methods of the invented site.

use rust_decimal::Decimal;

use crate::domain::method::{
    Attribute, Formula, Grade, Halves, Input, InterfaceRead, Level, MethodContent, Reportable, RoundTo,
    Rounding, Settings, Stage,
};

/// Code, name and content of every method of the demo.
pub fn all() -> Vec<(&'static str, &'static str, MethodContent)> {
    vec![
        ("APP-01", "Appearance as stored and after the label shake", appearance()),
        ("SED-00", "As-stored sediment", as_stored()),
        ("RED-02", "Inversions to uniform", redispersibility()),
        ("PH-03", "pH of the suspension", ph()),
        ("VIS-04", "Apparent viscosity at 20 °C", viscosity()),
        ("SED-05", "Sedimentation after shaking", sedimentation()),
        ("ASY-06", "Assay by weight and dilution", assay()),
        ("WAT-08", "Water content", water()),
    ]
}

/// What most methods share; each changes what is its own.
fn plain(unit: &str, decimals: u32, replicates: u32, settings: Settings) -> MethodContent {
    MethodContent {
        stage: Stage::AfterRedispersion,
        unit: unit.to_string(),
        reading_decimals: decimals,
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(decimals) },
        replicates,
        level: Level::Reading,
        reportable: Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::TEN) },
        possible_least: Decimal::ZERO,
        possible_most: Decimal::from(100_000),
        repeatability: None,
        needs_check: true,
        second_reader_tolerance: None,
        hides_limits: false,
        is_repeatable_on_container: true,
        containers_needed: 1,
        ml_needed: None,
        needs_unopened: false,
        may_share_after: true,
        test_within_days: 14,
        hands_on_minutes: 15,
        instruments: Vec::new(),
        settings,
    }
}

fn grades(words: &[(&str, &str)]) -> Vec<Grade> {
    words
        .iter()
        .enumerate()
        .map(|(at, (word, anchor))| Grade {
            code: at.to_string(),
            word: word.to_string(),
            anchor: anchor.to_string(),
            photo: None,
        })
        .collect()
}

fn attribute(code: &str, title: &str, words: &[(&str, &str)]) -> Attribute {
    Attribute {
        code: code.to_string(),
        title: title.to_string(),
        is_after_shake: false,
        grades: grades(words),
    }
}

fn after_shake(code: &str, title: &str, words: &[(&str, &str)]) -> Attribute {
    Attribute { is_after_shake: true, ..attribute(code, title, words) }
}

fn appearance() -> MethodContent {
    let attributes = vec![
        attribute(
            "clarity",
            "Supernatant clarity",
            &[
                ("clear", "print reads through it"),
                ("slightly hazy", "print reads through it, edges soft"),
                ("hazy", "print is seen, not read"),
                ("cloudy", "nothing is seen through it"),
            ],
        ),
        attribute(
            "foreign_matter",
            "Foreign matter",
            &[("none", "nothing is seen against black and white"), ("seen", "say what, in the remarks")],
        ),
        after_shake(
            "colour",
            "Colour",
            &[
                ("matches", "no difference from the reference bottle"),
                ("differs", "a difference is seen in daylight"),
            ],
        ),
        after_shake(
            "caking",
            "Caking",
            &[
                ("none", "the base is free at the first inversion"),
                ("soft bed", "the bed moves within five inversions"),
                ("firm bed", "pieces break off the bed"),
                ("cake", "the bed stays after ten inversions"),
            ],
        ),
    ];
    MethodContent {
        stage: Stage::BeforeDisturbance,
        reportable: Reportable::EachContainer,
        level: Level::Container,
        hides_limits: true,
        hands_on_minutes: 10,
        test_within_days: 1,
        ..plain("", 0, 1, Settings::Appearance { attributes })
    }
}

fn as_stored() -> MethodContent {
    MethodContent {
        stage: Stage::BeforeDisturbance,
        level: Level::Container,
        reportable: Reportable::EachContainer,
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(2) },
        possible_most: Decimal::from(500),
        hands_on_minutes: 5,
        test_within_days: 1,
        ..plain("", 0, 1, Settings::AsStoredSediment)
    }
}

fn redispersibility() -> MethodContent {
    let settings = Settings::Redispersibility {
        cap: 100,
        beat_per_minute: 60,
        inspect_every: 1,
        instruction: "Turn the bottle through 180° and back, one inversion a second; look at the base."
            .to_string(),
    };
    MethodContent {
        stage: Stage::Redispersion,
        level: Level::Container,
        reportable: Reportable::Worst { highest: true },
        possible_most: Decimal::from(100),
        hides_limits: true,
        is_repeatable_on_container: false,
        containers_needed: 3,
        test_within_days: 1,
        hands_on_minutes: 15,
        ..plain("inversions", 0, 1, settings)
    }
}

fn ph() -> MethodContent {
    let settings = Settings::Ph {
        temperature_least_c: Decimal::from(20),
        temperature_most_c: Decimal::from(25),
        slope_least_percent: Decimal::from(95),
        slope_most_percent: Decimal::from(105),
    };
    MethodContent {
        reportable: Reportable::Mean { range_at_most: Some(Decimal::new(10, 2)), rsd_percent_at_most: None },
        possible_most: Decimal::from(14),
        repeatability: Some(Decimal::new(5, 2)),
        instruments: vec!["pH meter".to_string()],
        hands_on_minutes: 12,
        ..plain("pH units", 2, 3, settings)
    }
}

fn viscosity() -> MethodContent {
    let settings = Settings::Viscosity {
        spindle: "V3".to_string(),
        speed_rpm: Decimal::from(30),
        torque_least_percent: Decimal::from(10),
        torque_most_percent: Decimal::from(90),
        temperature_c: Decimal::new(200, 1),
        temperature_tolerance_c: Decimal::new(5, 1),
        rest_minutes: 30,
    };
    MethodContent {
        reportable: Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::from(5)) },
        repeatability: Some(Decimal::from(200)),
        instruments: vec!["viscometer".to_string()],
        hands_on_minutes: 40,
        ..plain("mPa·s", 0, 3, settings)
    }
}

fn sedimentation() -> MethodContent {
    let settings = Settings::Sedimentation {
        planned_minutes: vec![0, 60, 1440],
        report_at_minute: 1440,
        reads: InterfaceRead::FallingBoundary,
        vessel_ml: Decimal::from(100),
    };
    MethodContent {
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(2) },
        possible_most: Decimal::from(110),
        instruments: vec!["cylinder".to_string()],
        hands_on_minutes: 20,
        ..plain("", 1, 1, settings)
    }
}

/// Content by weight and dilution: concentration found × volume ÷ weight, as per cent of the declared content.
fn assay() -> MethodContent {
    let input = |code: &str, label: &str, unit: &str, decimals| Input {
        code: code.to_string(),
        label: label.to_string(),
        unit: unit.to_string(),
        decimals,
    };
    let settings = Settings::Numeric {
        inputs: vec![
            input("weight", "Sample weight", "g", 4),
            input("volume", "Dilution volume", "mL", 1),
            input("found", "Concentration found", "mg/mL", 4),
        ],
        formula: Some(Formula {
            expression: "found * volume / weight / 40 * 100".to_string(),
            example_inputs: vec![
                ("weight".to_string(), Decimal::new(50_000, 4)),
                ("volume".to_string(), Decimal::new(1000, 1)),
                ("found".to_string(), Decimal::new(20_100, 4)),
            ],
            example_result: Decimal::new(1005, 1),
        }),
        components: Vec::new(),
        has_total: false,
    };
    MethodContent {
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(1) },
        level: Level::Preparation,
        reportable: Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::from(2)) },
        instruments: vec!["balance".to_string()],
        hands_on_minutes: 60,
        test_within_days: 30,
        ..plain("%", 4, 2, settings)
    }
}

fn water() -> MethodContent {
    let settings =
        Settings::Numeric { inputs: Vec::new(), formula: None, components: Vec::new(), has_total: false };
    MethodContent {
        stage: Stage::BeforeDisturbance,
        possible_most: Decimal::from(100),
        instruments: vec!["balance".to_string()],
        hands_on_minutes: 20,
        ..plain("%", 2, 2, settings)
    }
}
