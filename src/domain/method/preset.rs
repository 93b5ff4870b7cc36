//! What the form of a new method is filled with, per kind. Figures are common practice and the site's to
//! change.

use rust_decimal::Decimal;

use super::{
    Attribute, Grade, Halves, InterfaceRead, Level, MethodContent, Reportable, RoundTo, Rounding, Settings,
    Stage, TestKind,
};

/// The content a new method of this kind starts from.
pub fn of(kind: TestKind) -> MethodContent {
    let start = MethodContent {
        stage: Stage::AfterRedispersion,
        unit: String::new(),
        reading_decimals: 2,
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(2) },
        replicates: 2,
        level: Level::Reading,
        reportable: Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::TWO) },
        possible_least: Decimal::ZERO,
        possible_most: Decimal::from(1000),
        repeatability: None,
        needs_check: true,
        second_reader_tolerance: None,
        hides_limits: false,
        is_repeatable_on_container: true,
        containers_needed: 1,
        ml_needed: None,
        needs_unopened: false,
        may_share_after: true,
        test_within_days: 3,
        hands_on_minutes: 15,
        instruments: Vec::new(),
        settings: Settings::AsStoredSediment,
    };
    match kind {
        TestKind::Appearance => appearance(start),
        TestKind::AsStoredSediment => as_stored(start),
        TestKind::Redispersibility => redispersibility(start),
        TestKind::Ph => ph(start),
        TestKind::Viscosity => viscosity(start),
        TestKind::Sedimentation => sedimentation(start),
        TestKind::Numeric => MethodContent {
            possible_most: Decimal::from(1_000_000),
            settings: Settings::Numeric {
                inputs: Vec::new(),
                formula: None,
                components: Vec::new(),
                has_total: false,
            },
            ..start
        },
    }
}

fn decimals(content: MethodContent, decimals: u32) -> MethodContent {
    let rounding = Rounding { to: RoundTo::Decimals(decimals), ..content.rounding };
    MethodContent { reading_decimals: decimals, rounding, ..content }
}

/// Clarity as decision A14 words it; caking by how the bed gives way.
fn appearance(start: MethodContent) -> MethodContent {
    let attribute = |code: &str, title: &str, grades: &[(&str, &str, &str)]| Attribute {
        code: code.to_string(),
        title: title.to_string(),
        is_after_shake: code == "colour" || code == "caking",
        grades: grades
            .iter()
            .map(|(code, word, anchor)| Grade {
                code: code.to_string(),
                word: word.to_string(),
                anchor: anchor.to_string(),
                photo: None,
            })
            .collect(),
    };
    let attributes = vec![
        attribute(
            "clarity",
            "Supernatant",
            &[
                ("0", "clear", "Print reads through it."),
                ("1", "slightly hazy", "Print reads through it with a soft edge."),
                ("2", "hazy", "Print is seen, not read."),
                ("3", "cloudy", "Nothing is seen through it."),
            ],
        ),
        attribute(
            "caking",
            "Caking",
            &[
                ("0", "none", "The bed flows off the base when the container is tilted."),
                ("1", "slight", "A film stays on the base and goes with a few turns."),
                ("2", "firm", "The bed stays on the base and goes with hard shaking."),
                ("3", "hard cake", "The bed stays on the base whatever is done."),
            ],
        ),
        attribute(
            "colour",
            "Colour",
            &[
                ("match", "matches the standard", "No difference beside the standard."),
                ("differs", "differs", "A difference is seen beside the standard."),
            ],
        ),
    ];
    let content = MethodContent {
        stage: Stage::BeforeDisturbance,
        replicates: 1,
        level: Level::Container,
        reportable: Reportable::EachContainer,
        hides_limits: true,
        needs_unopened: true,
        test_within_days: 0,
        hands_on_minutes: 5,
        possible_most: Decimal::ONE_HUNDRED,
        settings: Settings::Appearance { attributes },
        ..start
    };
    decimals(content, 0)
}

fn as_stored(start: MethodContent) -> MethodContent {
    MethodContent {
        stage: Stage::BeforeDisturbance,
        reading_decimals: 1,
        replicates: 1,
        level: Level::Container,
        reportable: Reportable::EachContainer,
        is_repeatable_on_container: true,
        needs_unopened: true,
        test_within_days: 0,
        hands_on_minutes: 5,
        possible_most: Decimal::from(500),
        settings: Settings::AsStoredSediment,
        ..start
    }
}

fn redispersibility(start: MethodContent) -> MethodContent {
    let content = MethodContent {
        stage: Stage::Redispersion,
        unit: "inversions".to_string(),
        replicates: 1,
        level: Level::Container,
        reportable: Reportable::Worst { highest: true },
        hides_limits: true,
        is_repeatable_on_container: false,
        containers_needed: 3,
        needs_unopened: true,
        test_within_days: 0,
        settings: Settings::Redispersibility {
            cap: 100,
            beat_per_minute: 60,
            inspect_every: 5,
            instruction: "Turn the container over by half a turn and back, once a beat.".to_string(),
        },
        ..start
    };
    decimals(content, 0)
}

fn ph(start: MethodContent) -> MethodContent {
    MethodContent {
        unit: "pH units".to_string(),
        reportable: Reportable::Mean { range_at_most: Some(Decimal::new(10, 2)), rsd_percent_at_most: None },
        possible_most: Decimal::from(14),
        repeatability: Some(Decimal::new(5, 2)),
        ml_needed: Some(Decimal::from(30)),
        instruments: vec!["pH meter".to_string()],
        settings: Settings::Ph {
            temperature_least_c: Decimal::from(20),
            temperature_most_c: Decimal::from(25),
            slope_least_percent: Decimal::from(95),
            slope_most_percent: Decimal::from(105),
        },
        ..start
    }
}

fn viscosity(start: MethodContent) -> MethodContent {
    let content = MethodContent {
        unit: "mPa·s".to_string(),
        reportable: Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::from(5)) },
        possible_most: Decimal::from(1_000_000),
        ml_needed: Some(Decimal::from(120)),
        hands_on_minutes: 30,
        instruments: vec!["viscometer".to_string()],
        settings: Settings::Viscosity {
            spindle: "2".to_string(),
            speed_rpm: Decimal::from(60),
            torque_least_percent: Decimal::from(10),
            torque_most_percent: Decimal::from(90),
            temperature_c: Decimal::from(20),
            temperature_tolerance_c: Decimal::new(5, 1),
            rest_minutes: 5,
        },
        ..start
    };
    decimals(content, 0)
}

fn sedimentation(start: MethodContent) -> MethodContent {
    MethodContent {
        reading_decimals: 1,
        replicates: 1,
        level: Level::Container,
        reportable: Reportable::Worst { highest: false },
        ml_needed: Some(Decimal::from(100)),
        possible_most: Decimal::from(120),
        hands_on_minutes: 20,
        settings: Settings::Sedimentation {
            planned_minutes: vec![10, 30, 60, 120, 1440],
            report_at_minute: 1440,
            reads: InterfaceRead::FallingBoundary,
            vessel_ml: Decimal::from(120),
        },
        ..start
    }
}
