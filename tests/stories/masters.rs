//! The master record: written in a draft, checked as a whole, signed by two, frozen, scaled, compared.

use crate::support::{Lab, Seen, world};

/// A draft of an antacid suspension without a master record; answers with its path.
fn draft(lab: &Lab) -> String {
    let product = world::product(lab, "TW-104");
    world::material(lab, "M-001", "magnesium hydroxide", "active");
    world::material(lab, "M-002", "xanthan gum", "suspending agent");
    world::material(lab, "M-003", "purified water", "vehicle");
    let fields = [("product", &*product.to_string()), ("code", "F-104"), ("name", "Xanthan")];
    let page = lab.formulator().does("/formulations/new", "/formulations/new", &fields);
    let action = format!("{}/draft", page.location.unwrap());
    let recipe = [
        ("reason", "first version of the recipe"),
        ("quantity_basis", "100 mL"),
        ("target_total", "100"),
        ("ingredient.1.material", "1"),
        ("ingredient.1.quantity", "8.00"),
        ("ingredient.1.unit", "g"),
        ("ingredient.2.material", "2"),
        ("ingredient.2.quantity", "0.40"),
        ("ingredient.2.unit", "g"),
        ("ingredient.3.material", "3"),
        ("ingredient.3.qs", "yes"),
    ];
    lab.formulator().does(&action, &action, &recipe).location.unwrap()
}

const WEIGHING: [(&str, &str); 16] = [
    ("size.1", "500"),
    ("size_unit", "L"),
    ("weigh.1.unit", "kg"),
    ("weigh.1.step", "0.01"),
    ("weigh.1.below", "1"),
    ("weigh.1.above", "1"),
    ("weigh.1.potency", "yes"),
    ("weigh.2.unit", "kg"),
    ("weigh.2.step", "0.001"),
    ("weigh.2.overage", "2.5"),
    ("weigh.2.below", "0"),
    ("weigh.2.above", "2"),
    ("weigh.3.unit", "L"),
    ("weigh.3.step", "0.1"),
    ("weigh.3.percent", ""),
    ("weigh.3.above", ""),
];

fn adds(lab: &Lab, version: &str, path: &str, fields: &[(&str, &str)]) -> Seen {
    let page = format!("{version}/{path}");
    lab.formulator().does(&page, &page, fields)
}

/// Sizes, weighing, two phases and their steps.
fn write_master(lab: &Lab, version: &str) {
    adds(lab, version, "master", &WEIGHING);
    adds(lab, version, "phases/1", &[("name", "Dispensing"), ("any_order", "yes")]);
    let weigh = |number: &str, material: &str, title: &str| {
        let path = format!("phases/1/steps/{number}");
        let fields = [
            ("kind", "dispense"),
            ("title", title),
            ("instruction", "Weigh into the tared drum."),
            ("material", material),
            ("needs_check", "yes"),
        ];
        adds(lab, version, &path, &fields);
    };
    weigh("1", "1", "Weigh the hydroxide");
    weigh("2", "2", "Weigh the gum");
    let compounding = [
        ("name", "Compounding"),
        ("yield_unit", "L"),
        ("per_size_unit", "1"),
        ("least_percent", "97"),
        ("most_percent", "101"),
    ];
    adds(lab, version, "phases/2", &compounding);
    let hydrate = [
        ("kind", "disperse and hydrate"),
        ("title", "Hydrate the gum"),
        ("instruction", "Strew the gum into the vortex."),
        ("equipment_class", "mixing vessel"),
        ("value.1.name", "Speed"),
        ("value.1.unit", "rpm"),
        ("value.1.least", "1200"),
        ("value.1.most", "1500"),
        ("least_minutes", "30"),
        ("then", "next"),
    ];
    let next = adds(lab, version, "phases/2/steps/1", &hydrate);
    assert_eq!(next.location.unwrap(), format!("{version}/phases/2/steps/2"));
    let make_up = [
        ("kind", "make up to volume"),
        ("title", "Make up"),
        ("instruction", "Make up with water to 500 L."),
    ];
    adds(lab, version, "phases/2/steps/2", &make_up);
}

/// req_U5: written, told what is missing all at once, signed by two, frozen; the next version differs in percent.
#[test]
fn a_master_record_is_written_checked_signed_by_two_and_compared() {
    let lab = Lab::new();
    let version = draft(&lab);
    lab.formulator().sees(&version, "Write the master record");
    adds(&lab, &version, "master", &WEIGHING);
    let page = lab.formulator().sees(&version, "Before it can be signed");
    for fault in [
        "No phase is written",
        "0 % of xanthan gum is dispensed over all steps",
        "no step makes up to volume",
    ] {
        assert!(page.text().contains(fault), "{fault}: {}", page.text());
    }
    let sign = format!("{version}/sign");
    let fields = [("user_name", "tomas.reyle"), ("password", crate::support::PASSWORD)];
    let refused = lab.formulator().submits(&version, &sign, &fields);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("The master record is not complete. No phase is written"));

    write_master(&lab, &version);
    let page = lab.formulator().get(&version).text();
    assert!(!page.contains("Before it can be signed"), "{page}");
    lab.formulator().signs(&version, &sign, &[]);
    lab.reviewer().signs(&version, &sign, &[]);
    let page = format!("{version}/phases/2/steps/1");
    assert_eq!(lab.formulator().get(&page).status, 409, "frozen");
    lab.auditor().sees(&version, "2.1 Hydrate the gum");

    let formulation = "/formulations/1";
    let action = format!("{formulation}/draft");
    let next = lab.formulator().does(&action, &action, &[("reason", "a faster mixer was bought")]);
    let next = next.location.unwrap();
    lab.formulator().does(
        &format!("{next}/phases/2/steps/1"),
        &format!("{next}/phases/2/steps/1"),
        &[("value.1.most", "1800")],
    );
    let compare = format!("{formulation}/compare?old=1&new=2");
    let seen = lab.formulator().sees(&compare, "1 difference between version 1");
    assert!(seen.text().contains("Step “Hydrate the gum”: Speed, most"), "{}", seen.text());
    assert!(seen.text().replace('\u{202f}', " ").contains("+20.00 %"));
}

/// screen 15e: batch size → amounts, with the rounding rule shown.
#[test]
fn a_batch_size_is_scaled_with_its_rounding_and_its_formulas() {
    let lab = Lab::new();
    let version = draft(&lab);
    write_master(&lab, &version);
    let seen = lab.operator().sees(&format!("{version}/scaling"), "rounded once to the balance's step");
    let text = seen.text().replace('\u{202f}', " ");
    for words in ["8.00 g × 500 L ÷ 100 mL", "40.00 kg", "with 2.5 % overage", "2.050 kg", "made up to 500 L"]
    {
        assert!(text.contains(words), "{words}: {text}");
    }
    let other = lab.operator().sees(&format!("{version}/scaling?size=250"), "1.025");
    assert!(other.text().contains("20.00"));
}

#[test]
fn what_was_mistyped_in_a_step_comes_back_with_everything_kept() {
    let lab = Lab::new();
    let version = draft(&lab);
    assert_eq!(lab.formulator().get(&format!("{version}/phases/1")).status, 409, "weighing comes first");
    write_master(&lab, &version);
    let path = format!("{version}/phases/2/steps/1");
    let fields = [("title", ""), ("value.2.least", "3"), ("least_minutes", "soon")];
    let seen = lab.formulator().submits(&path, &path, &fields);
    assert_eq!(seen.status, 422);
    for words in ["Title is empty", "Value 2 has no name", "“soon” is not a number"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    assert!(seen.html().contains("value=\"1500\""));
    assert_eq!(lab.analyst().get(&path).status, 403);
    assert_eq!(lab.formulator().get(&format!("{version}/phases/9")).status, 404);
    lab.formulator().does(&path, &path, &[("then", "remove")]);
    let after = lab.formulator().sees(&version, "2.1 Make up");
    assert!(!after.text().contains("Hydrate the gum"));
    adds(&lab, &version, "phases/2", &[("then", "remove")]);
    lab.formulator().sees(&version, "no step makes up to volume");
}

/// Two formulators at one draft: the second is shown what the first wrote, and nothing is lost.
#[test]
fn a_step_written_meanwhile_is_shown_before_it_is_overwritten() {
    let lab = Lab::new();
    let version = draft(&lab);
    write_master(&lab, &version);
    let path = format!("{version}/phases/2/steps/1");
    let mut stale = lab.formulator().get(&path).form(&path);
    lab.person("lena.marsh").does(&path, &path, &[("equipment_class", "high-shear mixer")]);
    stale.retain(|(name, _)| name != "least_minutes");
    stale.push(("least_minutes".to_string(), "45".to_string()));
    let seen = lab.formulator().posts(&path, &stale);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("Changed by Lena Marsh"), "{}", seen.text());
    let again = seen.form(&path);
    assert_eq!(lab.formulator().posts(&path, &again).status, 303);
    lab.formulator().sees(&version, "at least 45 min");
}
