//! A small record for the tests of this noun: two weighings in any order, compounding with a yield, filling.

use rust_decimal::Decimal;

use super::{Entry, EntryKind, PhaseYield, RecordContent, Verdict, Weighed};
use crate::domain::master::scale::{Amount, Scaled};
use crate::domain::master::{
    Dispense, MasterIngredient, MasterRecord, Phase, Step, StepKind, StepValue, TheoreticalYield, Tolerance,
};

fn step(kind: StepKind, title: &str) -> Step {
    Step { kind, title: title.to_string(), instruction: "As usual.".to_string(), ..Step::default() }
}

fn weigh(material: i64, title: &str) -> Step {
    let dispense = Some(Dispense { material, share_percent: Decimal::ONE_HUNDRED });
    Step { dispense, ..step(StepKind::Dispense, title) }
}

fn value(name: &str, unit: &str, least: i64, most: i64, is_in_process_check: bool) -> StepValue {
    StepValue {
        name: name.to_string(),
        unit: unit.to_string(),
        least: Some(Decimal::from(least)),
        most: Some(Decimal::from(most)),
        is_in_process_check,
        is_words: false,
    }
}

fn theory() -> Option<TheoreticalYield> {
    Some(TheoreticalYield {
        unit: "L".to_string(),
        per_size_unit: Decimal::ONE,
        least_percent: Decimal::from(97),
        most_percent: Decimal::from(101),
    })
}

fn phases() -> Vec<Phase> {
    let first =
        Step { needs_check: true, blind_within: Some(Decimal::new(2, 2)), ..weigh(1, "Weigh the active") };
    let hydrate = Step {
        values: vec![value("Speed", "rpm", 1200, 1500, false)],
        least_minutes: Some(10),
        most_minutes: Some(60),
        may_repeat: true,
        ..step(StepKind::Disperse, "Hydrate")
    };
    let fill = Step {
        values: vec![value("Fill volume", "mL", 99, 102, true)],
        stop_minutes_most: Some(15),
        ..step(StepKind::Fill, "Fill")
    };
    let phase = |name: &str, steps: Vec<Step>| Phase { name: name.to_string(), steps, ..Phase::default() };
    vec![
        Phase {
            is_in_any_order: true,
            ..phase("Dispensing", vec![first, Step { may_skip: true, ..weigh(2, "Weigh the gum") }])
        },
        Phase { theory: theory(), ..phase("Compounding", vec![hydrate, step(StepKind::MakeUp, "Make up")]) },
        Phase { theory: theory(), ..phase("Filling", vec![fill]) },
    ]
}

/// Steps: 1 and 2 weighings (1 is checked and weighed again in blind, 2 may be skipped), 3 hydrate (10 to 60 min, may
/// be repeated), 4 make up, 5 fill.
pub fn content() -> RecordContent {
    let tolerance = Tolerance { below: Some(Decimal::ONE), above: Some(Decimal::ONE), is_percent: true };
    let row = |material: i64| MasterIngredient {
        material,
        name: format!("material {material}"),
        unit: "kg".to_string(),
        rounding_step: Decimal::new(1, 2),
        tolerance,
        ..MasterIngredient::default()
    };
    let amount = |material: i64| Amount {
        material,
        name: format!("material {material}"),
        unit: "kg".to_string(),
        exact: Some(Decimal::from(40)),
        target: Some(Decimal::new(4000, 2)),
        rounding_step: Decimal::new(1, 2),
        is_quantity_sufficient: false,
        formula: String::new(),
    };
    let master = MasterRecord {
        batch_sizes: vec![Decimal::from(500)],
        size_unit: "L".to_string(),
        ingredients: vec![row(1), row(2)],
        phases: phases(),
    };
    let scaled = Scaled {
        size: Decimal::from(500),
        size_unit: "L".to_string(),
        amounts: vec![amount(1), amount(2)],
        sum: String::new(),
        density_g_per_ml: None,
        solid_volume_percent: None,
    };
    RecordContent {
        product: "TW-104".to_string(),
        presentation: "TW-104-200".to_string(),
        formulation: "F-104 version 2".to_string(),
        formulation_digest: String::new(),
        size: Decimal::from(500),
        size_unit: "L".to_string(),
        scaled,
        master,
    }
}

/// An entry behind those that are there, by the person with this account.
pub fn entry(before: &[Entry], step: usize, kind: EntryKind, account: i64) -> Entry {
    Entry {
        id: before.len() as i64 + 1,
        step,
        run: 1,
        kind,
        name: String::new(),
        point: String::new(),
        typed: String::new(),
        value: None,
        unit: String::new(),
        verdict: Verdict::NoLimit,
        limits: String::new(),
        weighed: Weighed::default(),
        material_lot: None,
        stock_entry: None,
        equipment: None,
        equipment_code: None,
        instrument: None,
        instrument_code: None,
        deviation: None,
        deviation_number: None,
        answers: None,
        happened_at: None,
        supersedes: None,
        account,
        by: format!("person {account}"),
        at: "2026-12-01T09:00:00.000Z".to_string(),
        reason: None,
    }
}

/// A yield of a phase, counted from 0, worked out by person 1.
pub fn yielded(phase: usize) -> PhaseYield {
    PhaseYield {
        id: phase as i64 + 1,
        phase,
        actual: Decimal::from(495),
        samples: Decimal::ZERO,
        rejects: Decimal::ZERO,
        waste: Decimal::ZERO,
        unit: "L".to_string(),
        theoretical: Decimal::from(500),
        percent: Decimal::new(9900, 2),
        accountable_percent: Decimal::new(9900, 2),
        verdict: Verdict::Within,
        limits: "97 to 101 %".to_string(),
        deviation: None,
        deviation_number: None,
        account: 1,
        by: "person 1".to_string(),
        at: "2026-12-01T09:00:00.000Z".to_string(),
        checked: None,
    }
}
