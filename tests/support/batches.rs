//! A lot in the making: an approved master record, its materials, vessel, filling line and balance.

use rust_decimal::Decimal;
use supernate::acts;
use supernate::domain::formulation::{FormulationContent, Ingredient};
use supernate::domain::instrument::{EventDetail, EventKind, NewEvent, NewInstrument};
use supernate::domain::master::{
    Dispense, MasterIngredient, MasterRecord, Phase, Potency, Step, StepKind, StepValue, TheoreticalYield,
    Tolerance,
};
use supernate::domain::material_lot::NewAssay;
use supernate::domain::version::Versioned;

use super::world::{
    approve, clean_equipment, formulation, material, material_lot, presentation, product,
    release_material_lot,
};
use super::{Lab, Person, Seen};

/// The shop floor of a story: steps 1 weigh the active (corrected, blind second weighing), 2 weigh the gum (may be
/// skipped), 3 hydrate (30 to 90 min, may be repeated), 4 make up, 5 hold (at most 240 min), 6 clear the line, 7 fill.
pub struct Floor<'a> {
    pub lab: &'a Lab,
    pub version: i64,
    pub presentation: i64,
    pub vessel: i64,
    pub line: i64,
    pub balance: i64,
}

fn decimal(text: &str) -> Decimal {
    text.parse().unwrap()
}

fn value(name: &str, unit: &str, least: &str, most: &str, is_in_process_check: bool) -> StepValue {
    let end = |text: &str| (!text.is_empty()).then(|| decimal(text));
    StepValue {
        name: name.to_string(),
        unit: unit.to_string(),
        least: end(least),
        most: end(most),
        is_in_process_check,
        is_words: false,
    }
}

fn words(name: &str) -> StepValue {
    StepValue { is_words: true, ..value(name, "", "", "", true) }
}

fn step(kind: StepKind, title: &str, instruction: &str) -> Step {
    Step { kind, title: title.to_string(), instruction: instruction.to_string(), ..Step::default() }
}

fn weigh(material: i64, title: &str) -> Step {
    Step {
        dispense: Some(Dispense { material, share_percent: Decimal::ONE_HUNDRED }),
        needs_check: true,
        ..step(StepKind::Dispense, title, "Weigh into a tared drum and label it.")
    }
}

fn theory(unit: &str, per: &str) -> Option<TheoreticalYield> {
    Some(TheoreticalYield {
        unit: unit.to_string(),
        per_size_unit: decimal(per),
        least_percent: decimal("97"),
        most_percent: decimal("101"),
    })
}

fn phases(active: i64, gum: i64) -> Vec<Phase> {
    let phase = |name: &str, steps: Vec<Step>| Phase { name: name.to_string(), steps, ..Phase::default() };
    let vessel = |step: Step| Step { equipment_class: "mixing vessel".to_string(), ..step };
    let hydrate = Step {
        values: vec![
            value("Speed", "rpm", "1200", "1500", false),
            value("pH", "pH units", "7.5", "8.5", true),
        ],
        least_minutes: Some(30),
        most_minutes: Some(90),
        may_repeat: true,
        ..vessel(step(StepKind::Disperse, "Hydrate the gum", "Strew the gum into the vortex."))
    };
    let hold = Step {
        most_minutes: Some(240),
        ..vessel(step(StepKind::Hold, "Hold the bulk", "Keep it stirred and covered."))
    };
    let clearance = Step {
        values: vec![words("Line free of other material")],
        needs_check: true,
        ..step(StepKind::LineClearance, "Clear the line", "Look at the line, its trays and its surroundings.")
    };
    let fill = Step {
        equipment_class: "filling line".to_string(),
        values: vec![value("Fill volume", "mL", "99.0", "102.0", true)],
        stop_minutes_most: Some(15),
        ..step(StepKind::Fill, "Fill", "Fill with the agitation on.")
    };
    vec![
        Phase {
            is_in_any_order: true,
            ..phase(
                "Dispensing",
                vec![
                    Step { blind_within: Some(decimal("0.02")), ..weigh(active, "Weigh the hydroxide") },
                    Step { may_skip: true, needs_check: false, ..weigh(gum, "Weigh the gum") },
                ],
            )
        },
        Phase {
            theory: theory("L", "1"),
            ..phase(
                "Compounding",
                vec![
                    hydrate,
                    vessel(step(StepKind::MakeUp, "Make up", "Make up with purified water to 500 L.")),
                    hold,
                ],
            )
        },
        Phase { theory: theory("bottles", "10"), ..phase("Filling", vec![clearance, fill]) },
    ]
}

fn row(material: i64, name: &str, unit: &str, rounding_step: &str) -> MasterIngredient {
    MasterIngredient {
        material,
        name: name.to_string(),
        unit: unit.to_string(),
        rounding_step: decimal(rounding_step),
        tolerance: Tolerance { below: Some(Decimal::ONE), above: Some(Decimal::ONE), is_percent: true },
        ..MasterIngredient::default()
    }
}

/// The approved version with its master record at 500 L: 40.00 kg of hydroxide, 2.000 kg of gum.
fn approved_master(lab: &Lab, product: i64) -> i64 {
    let named = [
        ("M-01", "magnesium hydroxide", "active", "8.00", "g"),
        ("M-02", "xanthan gum", "suspending agent", "0.40", "g"),
        ("M-03", "purified water", "vehicle", "0", "mL"),
    ];
    let ingredients: Vec<Ingredient> = named
        .iter()
        .map(|(code, name, function, quantity, unit)| Ingredient {
            material: material(lab, code, name, function),
            material_code: code.to_string(),
            name: name.to_string(),
            function: function.to_string(),
            quantity: decimal(quantity),
            unit: unit.to_string(),
            is_quantity_sufficient: *function == "vehicle",
        })
        .collect();
    let (active, gum, water) = (ingredients[0].material, ingredients[1].material, ingredients[2].material);
    let mut hydroxide = row(active, "magnesium hydroxide", "kg", "0.01");
    hydroxide.potency = Some(Potency { salt_factor: Decimal::ONE });
    let master = MasterRecord {
        batch_sizes: vec![decimal("500")],
        size_unit: "L".to_string(),
        ingredients: vec![
            hydroxide,
            row(gum, "xanthan gum", "kg", "0.001"),
            row(water, "purified water", "L", "0.1"),
        ],
        phases: phases(active, gum),
    };
    let content = FormulationContent {
        dosage_form: "oral suspension".to_string(),
        quantity_basis: "100 mL".to_string(),
        target_total: Some(decimal("100")),
        ingredients,
        master: Some(master),
        ..FormulationContent::default()
    };
    let formulation = formulation(lab, product, "F-104");
    let (db, author) = (&lab.app.db, lab.actor("tomas.reyle"));
    let reason = "first version with its master record";
    let version = acts::formulation::draft(db, &author, formulation, reason, &content).unwrap();
    approve(lab, Versioned::Formulation, version, "tomas.reyle", "ada.whitlock");
    version
}

/// A balance, calibrated and checked today.
pub fn balance(lab: &Lab, code: &str) -> i64 {
    let db = &lab.app.db;
    let new = NewInstrument {
        code: code.to_string(),
        name: "Floor balance".to_string(),
        kind: "balance".to_string(),
        needs_daily_check: true,
    };
    let id = acts::instrument::add(db, &lab.actor("maren.oddy"), &new).unwrap();
    for kind in [EventKind::Calibrated, EventKind::DailyCheck] {
        balance_event(lab, id, kind);
    }
    id
}

pub fn balance_event(lab: &Lab, balance: i64, kind: EventKind) {
    let today = lab.now().date();
    let detail = EventDetail {
        is_within_limits: true,
        reference: "weight set W-3".to_string(),
        ..EventDetail::default()
    };
    let due_on = (kind == EventKind::Calibrated).then(|| supernate::domain::moment::plus_days(today, 365));
    let new = NewEvent { kind, performed_on: today, due_on, detail };
    acts::instrument::record_event(&lab.app.db, &lab.actor("maren.oddy"), balance, &new).unwrap();
}

impl<'a> Floor<'a> {
    /// Everything ready: `ML-1` hydroxide (assay 98.5 %, water 2.0 %), `ML-2` gum, both released.
    pub fn new(lab: &'a Lab) -> Floor<'a> {
        let product = product(lab, "TW-104");
        Floor::of(lab, product, presentation(lab, product, "TW-104-100"))
    }

    /// The same for a product and presentation that exist.
    pub fn of(lab: &'a Lab, product: i64, presentation: i64) -> Floor<'a> {
        let version = approved_master(lab, product);
        let materials = lab.app.db.read(supernate::store::material::all).unwrap();
        let of = |code: &str| materials.iter().find(|one| one.code == code).unwrap().id;
        let active = material_lot(lab, of("M-01"), "ML-1", "200.00", "2028-06-30");
        let assay = NewAssay {
            assay: Some(decimal("98.5")),
            assay_unit: "%".to_string(),
            assay_basis: "anhydrous".to_string(),
            water: Some(decimal("2.0")),
            water_unit: "%".to_string(),
            reference: "certificate C-17".to_string(),
        };
        acts::material_lot::record_assay(&lab.app.db, &lab.actor("maren.oddy"), active, &assay).unwrap();
        release_material_lot(lab, active);
        release_material_lot(lab, material_lot(lab, of("M-02"), "ML-2", "25.000", "2028-06-30"));
        Floor {
            lab,
            version,
            presentation,
            vessel: clean_equipment(lab, "MV-2", "mixing vessel"),
            line: clean_equipment(lab, "FL-1", "filling line"),
            balance: balance(lab, "BAL-7"),
        }
    }

    /// Bea Skelton starts a lot of 500 L; answers with the path of its record.
    pub fn starts(&self, number: &str) -> String {
        let page = format!("/batches/new?formulation_version={}&size=500", self.version);
        let presentation = self.presentation.to_string();
        let fields = [
            ("number", number),
            ("presentation", &presentation),
            ("container_closure", "amber PET bottle, screw cap"),
        ];
        self.lab.operator().does(&page, "/batches/new", &fields).location.unwrap()
    }

    /// A person does something in a step: `does(bea, record, 3, "values/1", …)`.
    pub fn tries(
        &self,
        who: &Person<'_>,
        record: &str,
        step: usize,
        what: &str,
        fields: &[(&str, &str)],
    ) -> Seen {
        let page = format!("{record}/steps/{step}");
        who.submits(&page, &format!("{page}/{what}"), fields)
    }

    pub fn does(
        &self,
        who: &Person<'_>,
        record: &str,
        step: usize,
        what: &str,
        fields: &[(&str, &str)],
    ) -> Seen {
        let seen = self.tries(who, record, step, what, fields);
        assert_eq!(seen.status, 303, "step {step} {what}: {}", seen.text());
        seen
    }

    /// Starts a step in the equipment it asks for.
    pub fn begins(&self, record: &str, step: usize) {
        let equipment = match step {
            3..=5 => self.vessel.to_string(),
            7 => self.line.to_string(),
            _ => String::new(),
        };
        let fields = [("equipment", &*equipment), ("agitation", "yes")];
        let needed: &[(&str, &str)] = match step {
            7 => &fields,
            3..=5 => &fields[..1],
            _ => &[],
        };
        self.does(&self.lab.operator(), record, step, "start", needed);
    }

    /// Both weighings, the first of 41.44 kg weighed again in blind by Maren Oddy and checked.
    pub fn dispenses(&self, record: &str) {
        let (bea, maren) = (self.lab.operator(), self.lab.manager());
        let balance = self.balance.to_string();
        for (step, lot, net) in [(1, "ML-1", "41.44"), (2, "ML-2", "2.000")] {
            self.begins(record, step);
            let fields = [("material_lot", lot), ("balance", &balance), ("net", net)];
            self.does(&bea, record, step, "weighing", &fields);
            self.does(&bea, record, step, "end", &[]);
        }
        let (entry, form) = self.second_form(&maren, record);
        let (balance_name, net_name) = (format!("balance.{entry}"), format!("net.{entry}"));
        self.does(&maren, record, 1, &form, &[(&balance_name, &balance), (&net_name, "41.45")]);
        self.does(&maren, record, 1, "check", &[]);
    }

    /// The entry that is weighed again, and the end of its form's address.
    pub fn second_form(&self, who: &Person<'_>, record: &str) -> (i64, String) {
        let html = who.get(&format!("{record}/steps/1")).html();
        let at = html.find("/second/").expect("a form for the second weighing") + "/second/".len();
        let entry: String = html[at..].chars().take_while(char::is_ascii_digit).collect();
        (entry.parse().unwrap(), format!("second/{entry}"))
    }

    /// Hydrates for 45 min, makes up, holds for an hour.
    pub fn compounds(&self, record: &str) {
        let bea = self.lab.operator();
        self.begins(record, 3);
        self.does(&bea, record, 3, "values/1", &[("reading.1", "1350")]);
        self.lab.later_minutes(45);
        self.does(&bea, record, 3, "values/2", &[("reading.2", "8.02")]);
        self.does(&bea, record, 3, "end", &[]);
        for step in [4, 5] {
            self.begins(record, step);
            self.lab.later_minutes(60);
            self.does(&bea, record, step, "end", &[]);
        }
    }

    /// The yield of a phase, worked out by Bea Skelton and checked by Maren Oddy.
    pub fn yields(&self, record: &str, phase: usize, actual: &str, percent: &str) {
        let page = format!("{record}/yields/{phase}");
        self.lab.operator().does(&page, &page, &[("actual", actual)]);
        self.lab.manager().does(&page, &format!("{page}/check"), &[("percent", percent)]);
    }

    /// Clears the line and fills without a stop.
    pub fn fills(&self, record: &str) {
        let (bea, maren) = (self.lab.operator(), self.lab.manager());
        self.begins(record, 6);
        self.does(&bea, record, 6, "values/1", &[("reading.1", "conforms")]);
        self.does(&bea, record, 6, "end", &[]);
        self.does(&maren, record, 6, "check", &[]);
        self.begins(record, 7);
        for (at, volume) in [("1", "100.4"), ("2", "100.6"), ("3", "100.2")] {
            let name = format!("reading.{at}");
            self.does(&bea, record, 7, &format!("values/{at}"), &[(&name, volume)]);
        }
        self.does(&bea, record, 7, "end", &[]);
    }

    /// A whole lot, from the start to the closed record.
    pub fn makes(&self, number: &str) -> String {
        let record = self.starts(number);
        self.dispenses(&record);
        self.compounds(&record);
        self.yields(&record, 2, "496", "99.2");
        self.fills(&record);
        self.yields(&record, 3, "4930", "98.6");
        self.lab.operator().signs(&record, &format!("{record}/close"), &[]);
        record
    }

    /// Labels counted and checked, and every other item that rows do not show stated as present.
    pub fn completes_the_record(&self, lot: i64) {
        use supernate::domain::completeness::statement::NewAnswer;
        use supernate::domain::completeness::{AnswerKind, judge};
        use supernate::domain::packaging::{CountKind, LABEL, NewCount, NewPackagingItem};
        let db = &self.lab.app.db;
        let (bea, maren) = (self.lab.actor("bea.skelton"), self.lab.actor("maren.oddy"));
        let new = NewPackagingItem {
            kind: LABEL.to_string(),
            name: "label, version 3".to_string(),
            material_lot: None,
            least_percent: decimal("99.5"),
            most_percent: decimal("100.5"),
        };
        let item = acts::packaging::add(db, &bea, lot, &new).unwrap();
        for (kind, count) in [(CountKind::Issued, 5000), (CountKind::Used, 4930), (CountKind::Destroyed, 70)]
        {
            let new = NewCount { kind, count, supersedes: None, why: String::new() };
            acts::packaging::count(db, &bea, item, &new).unwrap();
        }
        acts::packaging::check(db, &maren, item).unwrap();
        let evidence = db.read(|reader| supernate::store::completeness::evidence(reader, lot)).unwrap();
        for item in judge(&evidence).into_iter().filter(|item| item.is_missing()) {
            let text = "stands on sheet 1 of the annex".to_string();
            let new = NewAnswer { item: item.number, kind: AnswerKind::Present, text };
            acts::completeness::answer(db, &maren, lot, &new).unwrap();
        }
    }
}
