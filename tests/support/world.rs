//! Ready-made records of the small named world, made by the same acts a person does.

use rust_decimal::Decimal;
use supernate::acts;
use supernate::acts::method::NewMethod;
use supernate::acts::protocol::NewProtocol;
use supernate::acts::pull::Taking;
use supernate::acts::secret::Secrets;
use supernate::acts::signature::{Approval, Authorship, Means, Signed, authenticate};
use supernate::domain::actor::Actor;
use supernate::domain::chamber::NewChamber;
use supernate::domain::formulation::{FormulationContent, Ingredient, IntendedState, NewFormulation};
use supernate::domain::lot::{NewLot, Scale};
use supernate::domain::material::NewMaterial;
use supernate::domain::method::{
    Component, Formula, Input, MethodContent, Reportable, Settings, TestKind, preset,
};
use supernate::domain::product::{NewPresentation, NewProduct};
use supernate::domain::protocol::Programme;
use supernate::domain::specification::{Limit, Range, SpecificationContent, TestLimits, Way};
use supernate::domain::study::NewStudy;
use supernate::domain::version::Versioned;
use supernate::store;

use super::{Lab, PASSWORD};

/// A signature of a person of the laboratory.
pub fn signed<M: Means>(lab: &Lab, actor: &Actor) -> Signed<M> {
    let secrets: &Secrets = &lab.app.secrets;
    let user_name = lab.app.db.read(|reader| store::account::get(reader, actor.account)).unwrap().user_name;
    authenticate::<M>(&lab.app.db, secrets, actor, &user_name, PASSWORD).unwrap()
}

/// Author and a second person sign a version of any definition.
pub fn approve(lab: &Lab, of: Versioned, id: i64, author: &str, approver: &str) {
    let db = &lab.app.db;
    let (author, approver) = (lab.actor(author), lab.actor(approver));
    let seen = db.read(|reader| store::version::get(reader, of, id)).unwrap().digest();
    let check: acts::version::ContentCheck<'_> = match of {
        Versioned::Method => &acts::method::check,
        Versioned::Specification => &acts::specification::check,
        Versioned::Protocol => &acts::protocol::content_is_sound,
        _ => &acts::version::unchecked,
    };
    let own = signed::<Authorship>(lab, &author);
    acts::version::sign(db, &author, of, id, &seen, &own, check).unwrap();
    let second = signed::<Approval>(lab, &approver);
    acts::version::approve(db, &approver, of, id, &seen, &second, check).unwrap();
}

/// The approved version of the kind's method, made the first time it is asked for: code `M-PH`,
/// `M-VISCOSITY` …
pub fn approved_method(lab: &Lab, kind: TestKind) -> i64 {
    let code = format!("M-{}", kind.code().to_uppercase());
    method_with(lab, &code, kind.words(), method_content(kind))
}

/// An approved method with this content; the same code again gives the same version.
pub fn method_with(lab: &Lab, code: &str, name: &str, content: MethodContent) -> i64 {
    let db = &lab.app.db;
    let known = db.read(store::method::approved_versions).unwrap();
    if let Some(found) = known.into_iter().find(|version| version.code == code) {
        return found.id;
    }
    let new = NewMethod { code: code.to_string(), name: name.to_string(), content };
    let id = acts::method::add(db, &lab.actor("maren.oddy"), &new).unwrap();
    approve(lab, Versioned::Method, id, "maren.oddy", "otis.vane");
    id
}

/// The preset of the kind; the numeric test is an assay by weight and dilution.
pub fn method_content(kind: TestKind) -> MethodContent {
    let mut content = preset::of(kind);
    if let Settings::Appearance { attributes } = &mut content.settings {
        attributes.iter_mut().for_each(|attribute| attribute.is_after_shake = false);
    }
    if kind == TestKind::Numeric {
        content.unit = "%".to_string();
        content.rounding.to = supernate::domain::method::RoundTo::Decimals(1);
        content.reportable =
            Reportable::Mean { range_at_most: None, rsd_percent_at_most: Some(Decimal::from(2)) };
        content.settings = Settings::Numeric {
            inputs: vec![input("found", "Found", "mg/mL"), input("declared", "Declared", "mg/mL")],
            formula: Some(Formula {
                expression: "found × 100 ÷ declared".to_string(),
                example_inputs: vec![
                    ("found".to_string(), Decimal::new(395, 1)),
                    ("declared".to_string(), Decimal::from(40)),
                ],
                example_result: Decimal::new(988, 1),
            }),
            components: Vec::new(),
            has_total: false,
        };
    }
    content
}

fn input(code: &str, label: &str, unit: &str) -> Input {
    Input { code: code.to_string(), label: label.to_string(), unit: unit.to_string(), decimals: 2 }
}

/// The approved method of degradation products: A, unspecified ones, and their total.
pub fn approved_degradation_method(lab: &Lab) -> i64 {
    let component = |code: &str, title: &str, is_unspecified: bool| Component {
        code: code.to_string(),
        title: title.to_string(),
        is_unspecified,
        reporting_threshold: Some(Decimal::new(5, 2)),
    };
    let mut content = preset::of(TestKind::Numeric);
    content.unit = "%".to_string();
    content.replicates = 1;
    content.reportable = Reportable::EachContainer;
    content.settings = Settings::Numeric {
        inputs: Vec::new(),
        formula: None,
        components: vec![
            component("a", "Degradation product A", false),
            component("unspecified", "Unspecified", true),
        ],
        has_total: true,
    };
    method_with(lab, "M-DEGRADATION", "Degradation products", content)
}

/// The test code a kind goes by in specifications, results and charts.
pub fn test_code(kind: TestKind) -> &'static str {
    if kind == TestKind::Numeric { "assay" } else { kind.code() }
}

/// Limits of the kind's usual test: release, shelf life and in use.
pub fn test_limits(lab: &Lab, kind: TestKind) -> TestLimits {
    let version = approved_method(lab, kind);
    let method = lab.app.db.read(|reader| store::method::version(reader, version)).unwrap();
    let (release, shelf_life, in_use) = match kind {
        TestKind::Appearance => {
            let life = grades(&[("clarity", &["0", "1"]), ("caking", &["0", "1"]), ("colour", &["match"])]);
            (grades(&[("caking", &["0"]), ("colour", &["match"])]), life, Limit::None)
        }
        TestKind::AsStoredSediment => (Limit::None, between("0.60", ""), Limit::None),
        TestKind::Redispersibility => (between("", "10"), between("", "20"), between("", "20")),
        TestKind::Ph => (between("6.20", "7.20"), between("6.00", "7.50"), between("6.00", "7.50")),
        TestKind::Viscosity => (between("800", "1400"), between("600", "1600"), Limit::None),
        TestKind::Sedimentation => (between("0.90", ""), between("0.80", ""), Limit::None),
        TestKind::Numeric => (between("97.0", "103.0"), between("95.0", "105.0"), Limit::None),
    };
    TestLimits {
        test: test_code(kind).to_string(),
        title: if kind == TestKind::Numeric { "Assay".to_string() } else { kind.words().to_string() },
        method: method.method,
        unit: method.content.unit,
        release,
        shelf_life,
        in_use,
        way: Way::Rounding,
    }
}

/// `between("6.00", "7.50")`; an empty end is open.
pub fn between(lower: &str, upper: &str) -> Limit {
    let Range { lower, upper } = range(lower, upper);
    Limit::Between { lower, upper }
}

pub fn range(lower: &str, upper: &str) -> Range {
    let end = |text: &str| (!text.is_empty()).then(|| text.parse().unwrap());
    Range { lower: end(lower), upper: end(upper) }
}

pub fn grades(attributes: &[(&str, &[&str])]) -> Limit {
    let one = |(code, grades): &(&str, &[&str])| {
        (code.to_string(), grades.iter().map(|grade| grade.to_string()).collect())
    };
    Limit::Grades(attributes.iter().map(one).collect())
}

/// The approved specification version of a presentation with these kinds of test, made the first time.
pub fn approved_specification(lab: &Lab, presentation: i64, kinds: &[TestKind]) -> i64 {
    let db = &lab.app.db;
    let known = db.read(|reader| store::specification::approved_of(reader, presentation)).unwrap();
    if let Some(found) = known {
        return found.id;
    }
    let tests = kinds.iter().map(|kind| test_limits(lab, *kind)).collect();
    let code = format!("S-{presentation}");
    let content = SpecificationContent { tests };
    let id = acts::specification::add(db, &lab.actor("maren.oddy"), &code, presentation, &content).unwrap();
    approve(lab, Versioned::Specification, id, "maren.oddy", "ada.whitlock");
    id
}

/// An own product with this code, an oral suspension.
pub fn product(lab: &Lab, code: &str) -> i64 {
    let new = NewProduct {
        code: code.to_string(),
        name: "Antacid oral suspension".to_string(),
        dosage_form: "oral suspension".to_string(),
        customer: None,
    };
    acts::product::add(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap()
}

/// A presentation of a product in 200 mL bottles.
pub fn presentation(lab: &Lab, product: i64, code: &str) -> i64 {
    let new = NewPresentation {
        product,
        code: code.to_string(),
        strength: "400 mg/5 mL".to_string(),
        pack: "200 mL amber PET bottle".to_string(),
        container_word: "bottle".to_string(),
        fill_ml: Some(Decimal::from(200)),
        market: "United Kingdom".to_string(),
        permeability: "semi-permeable".to_string(),
    };
    acts::product::add_presentation(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap()
}

pub fn material(lab: &Lab, code: &str, name: &str, function: &str) -> i64 {
    let new = NewMaterial {
        code: code.to_string(),
        name: name.to_string(),
        function: function.to_string(),
        density_g_per_ml: None,
    };
    acts::material::add(&lab.app.db, &lab.actor("tomas.reyle"), &new).unwrap()
}

/// A formulation of a product without a version.
pub fn formulation(lab: &Lab, product: i64, code: &str) -> i64 {
    let new = NewFormulation { product, code: code.to_string(), name: "Xanthan and cellulose".to_string() };
    acts::formulation::add(&lab.app.db, &lab.actor("tomas.reyle"), &new).unwrap()
}

/// An approved formulation version of a product: magnesium hydroxide in xanthan and water.
pub fn approved_formulation(lab: &Lab, product: i64) -> i64 {
    let code = format!("F-{product}");
    let formulation = formulation(lab, product, &code);
    let row = |number: i64, name: &str, function: &str, quantity: &str, is_quantity_sufficient: bool| {
        let material_code = format!("M-{product}-{number}");
        Ingredient {
            material: material(lab, &material_code, name, function),
            material_code,
            name: name.to_string(),
            function: function.to_string(),
            quantity: quantity.parse().unwrap(),
            unit: if is_quantity_sufficient { "mL" } else { "g" }.to_string(),
            is_quantity_sufficient,
        }
    };
    let content = FormulationContent {
        dosage_form: "oral suspension".to_string(),
        intended_state: IntendedState::Flocculated,
        ingredients: vec![
            row(1, "magnesium hydroxide", "active", "8.00", false),
            row(2, "xanthan gum", "suspending agent", "0.40", false),
            row(3, "purified water", "vehicle", "0", true),
        ],
        quantity_basis: "100 mL".to_string(),
        target_total: Some(Decimal::from(100)),
        physical: Default::default(),
        master: None,
    };
    let (db, author) = (&lab.app.db, lab.actor("tomas.reyle"));
    let version =
        acts::formulation::draft(db, &author, formulation, "first version of the recipe", &content).unwrap();
    approve(lab, Versioned::Formulation, version, "tomas.reyle", "ada.whitlock");
    version
}

/// A lot of an approved formulation of a new product, 100 mL bottles for this market.
pub fn lot_for_market(lab: &Lab, number: &str, market: &str) -> i64 {
    use supernate::domain::product::NewPresentation;
    let db = &lab.app.db;
    let product = product(lab, &format!("P{number}"));
    let formulation_version = approved_formulation(lab, product);
    let new = NewPresentation {
        product,
        code: format!("P{number}-100"),
        strength: "400 mg per 5 mL".to_string(),
        pack: "amber glass".to_string(),
        container_word: "bottle".to_string(),
        fill_ml: Some(Decimal::from(100)),
        market: market.to_string(),
        permeability: "impermeable".to_string(),
    };
    let presentation = acts::product::add_presentation(db, &lab.actor("maren.oddy"), &new).unwrap();
    let new = NewLot {
        number: number.to_string(),
        presentation,
        formulation_version,
        made_on: lab.now().date(),
        size: Some(Decimal::from(500)),
        size_unit: Some("L".to_string()),
        scale: Scale::Production,
        container_closure: "amber glass, screw cap".to_string(),
        bulk_lot: None,
    };
    acts::lot::make(db, &lab.actor("bea.skelton"), &new).unwrap()
}

/// A release sample with these tests, and the analysts qualified for their methods. Answers with sample and tests.
pub fn release_sample(lab: &Lab, lot: i64, kinds: &[TestKind]) -> (i64, Vec<i64>) {
    use supernate::domain::sample::{NewSample, Purpose};
    let db = &lab.app.db;
    let presentation = db.read(|reader| store::lot::get(reader, lot)).unwrap().presentation;
    approved_specification(lab, presentation, kinds);
    for kind in kinds {
        let version = approved_method(lab, *kind);
        for user_name in ["rafe.tolland", "ilse.brandt"] {
            qualify(lab, user_name, version);
        }
    }
    let new = NewSample {
        lot,
        purpose: Purpose::Release,
        containers: 6,
        condition_on_receipt: "seals whole".to_string(),
        handed_over_by: "Bea Skelton".to_string(),
        received_on: lab.now().date(),
        tests: kinds.iter().map(|kind| test_code(*kind).to_string()).collect(),
    };
    let id = acts::sample::receive(db, &lab.actor("rafe.tolland"), &new).unwrap();
    let sample = db.read(|reader| store::bench::sample(reader, id)).unwrap();
    let of = |kind: &TestKind| sample.tests.iter().find(|test| test.test == test_code(*kind)).unwrap().id;
    (id, kinds.iter().map(of).collect())
}

/// The person may do the method from today on for a year.
pub fn qualify(lab: &Lab, user_name: &str, method_version: i64) {
    use supernate::domain::qualification::NewQualification;
    let today = lab.now().date();
    let new = NewQualification {
        account: lab.actor(user_name).account,
        method_version,
        starts_on: today,
        ends_on: today + chrono::Duration::days(365),
        reference: "training record 12".to_string(),
    };
    acts::qualification::add(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap();
}

/// A calibrated instrument of the kind, with the day's check where its kind needs one.
pub fn instrument(lab: &Lab, code: &str, kind: &str) -> i64 {
    use supernate::domain::instrument::{EventDetail, EventKind, NewEvent, NewInstrument};
    let (db, manager) = (&lab.app.db, lab.actor("maren.oddy"));
    let is_meter = kind == "pH meter";
    let new = NewInstrument {
        code: code.to_string(),
        name: format!("Bench {kind}"),
        kind: kind.to_string(),
        needs_daily_check: is_meter,
    };
    let id = acts::instrument::add(db, &manager, &new).unwrap();
    let today = lab.now().date();
    let detail = EventDetail {
        is_within_limits: true,
        buffers: if is_meter { vec![Decimal::new(401, 2), Decimal::new(700, 2)] } else { Vec::new() },
        slope_percent: is_meter.then(|| Decimal::new(986, 1)),
        reference: "certificate 77".to_string(),
        note: String::new(),
    };
    let due_on = Some(today + chrono::Duration::days(180));
    let calibrated =
        NewEvent { kind: EventKind::Calibrated, performed_on: today, due_on, detail: detail.clone() };
    acts::instrument::record_event(db, &manager, id, &calibrated).unwrap();
    if is_meter {
        let check = NewEvent { kind: EventKind::DailyCheck, performed_on: today, due_on: None, detail };
        acts::instrument::record_event(db, &lab.actor("rafe.tolland"), id, &check).unwrap();
    }
    id
}

/// The site's first presentation, TW-104 in 200 mL bottles, made with its approved formulation the first time.
pub fn first_presentation(lab: &Lab) -> i64 {
    let known = lab.app.db.read(store::lot::presentations).unwrap();
    if let Some((id, _)) = known.first() {
        return *id;
    }
    let product = product(lab, "TW-104");
    approved_formulation(lab, product);
    presentation(lab, product, "TW-104-200")
}

/// A lot of the first presentation, made a month ago.
pub fn lot(lab: &Lab, number: &str) -> i64 {
    let presentation = first_presentation(lab);
    let formulation_version = lab.app.db.read(store::lot::approved_formulations).unwrap()[0].0;
    let new = NewLot {
        number: number.to_string(),
        presentation,
        formulation_version,
        made_on: supernate::domain::moment::plus_days(lab.now().date(), -30),
        size: Some(Decimal::from(500)),
        size_unit: Some("L".to_string()),
        scale: Scale::Production,
        container_closure: "amber PET bottle, 28 mm polypropylene cap".to_string(),
        bulk_lot: None,
    };
    acts::lot::make(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap()
}

/// A chamber for each condition of the catalogue, made the first time.
pub fn chambers(lab: &Lab) {
    let db = &lab.app.db;
    if !db.read(store::chamber::all).unwrap().is_empty() {
        return;
    }
    for condition in db.read(store::condition::all).unwrap() {
        let new = NewChamber {
            code: format!("CH-{}", condition.code),
            name: format!("Chamber at {}", condition.name),
            condition: condition.id,
            location: "cellar".to_string(),
            qualification_due_on: "2030-06-30".parse().unwrap(),
        };
        acts::chamber::add(db, &lab.actor("maren.oddy"), &new).unwrap();
    }
}

/// The approved protocol version of the first presentation with these kinds of test, made the first time: the
/// usual arms of a primary study, every test at every age.
pub fn approved_protocol(lab: &Lab, kinds: &[TestKind]) -> i64 {
    let db = &lab.app.db;
    let presentation = first_presentation(lab);
    let known = db.read(|reader| store::protocol::approved_of(reader, presentation)).unwrap();
    if let Some((id, _)) = known.first() {
        return *id;
    }
    let new = NewProtocol {
        presentation,
        code: "SP-104".to_string(),
        title: "Primary stability".to_string(),
        programme: Programme::Primary,
        specification_version: approved_specification(lab, presentation, kinds),
    };
    let id = acts::protocol::add(db, &lab.actor("maren.oddy"), &new).unwrap();
    approve(lab, Versioned::Protocol, id, "maren.oddy", "ada.whitlock");
    id
}

/// A study with time zero today, of a new lot with this number, with these kinds of test.
pub fn study(lab: &Lab, lot_number: &str, kinds: &[TestKind]) -> i64 {
    let lot = lot(lab, lot_number);
    study_of(lab, lot, kinds)
}

/// A study with time zero today of a lot.
pub fn study_of(lab: &Lab, lot: i64, kinds: &[TestKind]) -> i64 {
    chambers(lab);
    let protocol_version = approved_protocol(lab, kinds);
    let db = &lab.app.db;
    let mut new = NewStudy {
        number: db.read(store::study::next_number).unwrap(),
        lot,
        protocol_version,
        started_on: lab.now().date(),
        chambers: Vec::new(),
    };
    let prepared = db.read(|reader| acts::study::prepare(reader, &new, new.started_on)).unwrap();
    let chambers = db.read(store::chamber::all).unwrap();
    let at = |condition: i64| chambers.iter().find(|one| one.condition == condition).map(|one| one.id);
    new.chambers = prepared.facts.arms.iter().map(|arm| at(arm.condition)).collect();
    acts::study::start(db, &lab.actor("maren.oddy"), &new).unwrap()
}

/// A pull of a study by the place of its arm (1 is 25/60 upright) and its age in words.
pub fn pull(lab: &Lab, study: i64, arm_position: i64, age: &str) -> store::pull::Pull {
    let pulls = lab.app.db.read(|reader| store::pull::of_study(reader, study)).unwrap();
    let is_it = |pull: &store::pull::Pull| pull.arm_position == arm_position && pull.age_text == age;
    pulls.into_iter().find(is_it).expect("such a pull")
}

/// The labels of the containers that a pull takes next.
pub fn labels(lab: &Lab, pull: &store::pull::Pull) -> Vec<String> {
    let here = lab.app.db.read(|reader| store::container::of_arm(reader, pull.study_arm)).unwrap();
    let needed = pull.facts.containers_needed;
    here.into_iter().filter(|one| one.event.is_none()).take(needed).map(|one| one.label).collect()
}

/// Takes a pull with the right containers, today, by the first analyst; answers with its sample.
pub fn take(lab: &Lab, pull: &store::pull::Pull) -> i64 {
    let taking = Taking {
        labels: labels(lab, pull),
        taken_on: lab.now().date(),
        why: "taken for this story".to_string(),
    };
    acts::pull::take(&lab.app.db, &lab.actor("rafe.tolland"), pull.id, &taking).unwrap();
    pull.sample
}

/// A delivery of a material in kg, under quarantine, that expires on a day.
pub fn material_lot(lab: &Lab, material: i64, number: &str, quantity: &str, expires_on: &str) -> i64 {
    let new = supernate::domain::material_lot::NewMaterialLot {
        material,
        number: number.to_string(),
        supplier: "Fellside Minerals".to_string(),
        supplier_lot: format!("F-{number}"),
        received_on: lab.now().date(),
        quantity: quantity.parse().unwrap(),
        unit: "kg".to_string(),
        packages: Some(2),
        retest_on: None,
        expires_on: Some(expires_on.parse().unwrap()),
        location: "cage 2".to_string(),
    };
    acts::material_lot::receive(&lab.app.db, &lab.actor("bea.skelton"), &new).unwrap()
}

/// QA releases a material lot.
pub fn release_material_lot(lab: &Lab, id: i64) {
    use supernate::acts::signature::MaterialStatus as Meaning;
    use supernate::domain::material_lot::{MaterialStatus, NewStatus};
    let qa = lab.actor("ada.whitlock");
    let why = "certificate and identity test agree".to_string();
    let new = NewStatus { status: MaterialStatus::Released, retest_on: None, why };
    acts::material_lot::set_status(&lab.app.db, &qa, id, &new, &signed::<Meaning>(lab, &qa)).unwrap();
}

/// A vessel that is cleaned and checked today.
pub fn clean_equipment(lab: &Lab, code: &str, class: &str) -> i64 {
    use supernate::domain::equipment::{EquipmentEventKind, NewEquipment, NewEquipmentEvent};
    let db = &lab.app.db;
    let new = NewEquipment {
        code: code.to_string(),
        name: format!("{class}, 500 L"),
        class: class.to_string(),
        location: "room 4".to_string(),
        clean_hold_days: 7,
        campaign_days: 0,
        needs_clean_check: true,
        needs_calibration: false,
    };
    let id = acts::equipment::add(db, &lab.actor("maren.oddy"), &new).unwrap();
    let events =
        [("bea.skelton", EquipmentEventKind::Cleaned), ("maren.oddy", EquipmentEventKind::CheckedClean)];
    for (who, kind) in events {
        let event = NewEquipmentEvent {
            kind,
            happened_on: lab.now().date(),
            due_on: None,
            lot: None,
            note: "hot water and agent 3".to_string(),
        };
        acts::equipment::record_event(db, &lab.actor(who), id, &event).unwrap();
    }
    id
}

/// States that the executed record of a lot is kept on paper.
pub fn record_elsewhere(lab: &Lab, lot: i64) {
    let new = supernate::domain::completeness::statement::NewElsewhere {
        reference: "BR-2026-011".to_string(),
        place: "paper archive, room 2".to_string(),
        why: "carried out on paper before this program".to_string(),
    };
    acts::completeness::refer(&lab.app.db, &lab.actor("maren.oddy"), lot, &new).unwrap();
}
