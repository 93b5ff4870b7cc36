//! The one door: what it lets through, what it writes down, what it refuses.

use crate::support::{Lab, world};
use supernate::domain::act::Act;
use supernate::domain::failure::Failure;
use supernate::domain::reason::Reason;
use supernate::domain::subject::Kind;
use supernate::store;

#[test]
fn the_same_submit_five_times_makes_one_record() {
    let lab = Lab::new();
    let person = lab.administrator();
    let page = format!("/people/{}", lab.actor("ilse.brandt").account);
    let mut pairs = person.get(&page).form(&format!("{page}/state"));
    pairs.retain(|(name, _)| name != "why");
    pairs.push(("why".to_string(), "left the company today".to_string()));
    let before = acts_named(&lab, "DisableAccount");
    let answers: Vec<_> = (0..5).map(|_| person.posts(&format!("{page}/state"), &pairs)).collect();
    for answer in &answers {
        assert_eq!((answer.status, answer.location.clone()), (303, Some(page.clone())), "{}", answer.text());
    }
    assert_eq!(acts_named(&lab, "DisableAccount"), before + 1);
    pairs.retain(|(name, _)| name != "why");
    pairs.push(("why".to_string(), "for quite another reason".to_string()));
    assert_eq!(person.posts(&format!("{page}/state"), &pairs).status, 409);
}

fn acts_named(lab: &Lab, code: &str) -> usize {
    let lines = lab.app.db.read(|reader| store::trail::before(reader, None, 10_000)).unwrap();
    lines.iter().filter(|line| line.code == code).count()
}

#[test]
fn an_act_that_fails_leaves_nothing_behind() {
    let lab = Lab::new();
    let actor = lab.actor("nell.farrow");
    let before = lab.app.db.read(store::trail::head).unwrap();
    let outcome: Result<(), Failure> =
        lab.app.db.change(&actor, Act::ChangeSetting, &Reason::none(), |change| {
            store::setting::set(change, "session.idle-minutes", "5")?;
            Err(Failure::missing("thing"))
        });
    assert!(outcome.is_err());
    assert_eq!(lab.app.db.read(store::trail::head).unwrap(), before);
    assert_eq!(lab.app.db.read(|reader| store::setting::get(reader, "session.idle-minutes")).unwrap(), None);
}

#[test]
fn another_program_cannot_write_to_the_file() {
    let lab = Lab::new();
    let file = lab.folder.0.join("supernate.sqlite");
    let other = rusqlite::Connection::open(&file).unwrap();
    let error = other.execute("insert into setting (name, value) values ('a', 'b')", []).unwrap_err();
    assert!(error.to_string().contains("current_act"), "{error}");
    for statement in [
        "update trail_act set reason = 'x'",
        "delete from trail_seal",
        "update trail_change set digest = x'00'",
        "delete from account",
        "update account_roles set roles = 'administrator'",
    ] {
        assert!(other.execute(statement, []).is_err(), "{statement}");
    }
}

#[test]
fn every_change_of_an_act_has_its_line_and_secrets_stay_out_of_it() {
    let lab = Lab::new();
    let page = "/me";
    lab.analyst().does(
        page,
        "/me/password",
        &[("present", crate::support::PASSWORD), ("password", "seven slow barges on the canal")],
    );
    let lines = lab.app.db.read(|reader| store::trail::before(reader, None, 1)).unwrap();
    assert_eq!(lines[0].code, "ChangePassword");
    let changes = lab.app.db.read(|reader| store::trail::changes_of(reader, lines[0].act)).unwrap();
    assert_eq!(changes.len(), 1);
    assert_eq!(changes[0].record, "account");
    let fields = changes[0].changes.clone().unwrap();
    assert!(fields.contains("password_hash") && !fields.contains("argon2"), "{fields}");
}

/// A record's page shows the newest part of a long history, and a page of its own shows all of it.
#[test]
fn a_long_history_is_cut_on_the_page_and_whole_on_its_own() {
    let lab = Lab::new();
    let lot = world::lot(&lab, "TW-104-0640");
    let page = format!("/lots/{lot}");
    assert!(!lab.manager().sees(&page, "Oldest first").text().contains("The whole history"));
    let actor = lab.actor("maren.oddy");
    for number in 1..=55 {
        let happens = lab.app.db.change(&actor, Act::RecordContainer, &Reason::none(), |change| {
            change.concerns(Kind::Lot, lot)?;
            change.tell(format!("event {number} of the lot"));
            Ok(())
        });
        happens.unwrap();
    }
    let whole = format!("/history/of/lot/{lot}");
    let cut = lab.manager().sees(&page, "The newest 50, oldest of them first");
    assert!(cut.links().contains(&whole), "{:?}", cut.links());
    assert!(!cut.text().contains("event 5 of the lot") && cut.text().contains("event 55 of the lot"));
    let first = lab.auditor().sees(&whole, "History of lot TW-104-0640");
    let older = first.links().into_iter().find(|path| path.contains("before=")).unwrap();
    lab.auditor().sees(&older, "recorded a lot");
    assert_eq!(lab.auditor().get("/history/of/lot/999").status, 404);
    assert_eq!(lab.auditor().get("/history/of/nothing/1").status, 404);
}

/// The page of an act shows each changed field as was and is, no raw document.
#[test]
fn the_page_of_an_act_shows_was_and_is_of_each_field() {
    let lab = Lab::new();
    let named = [("code", "M-PH"), ("name", "pH")];
    let made = lab.manager().does("/methods/new?kind=ph", "/methods/new", &named).location.unwrap();
    let edit = format!("{made}/edit");
    lab.manager().does(&edit, &edit, &[("reason", "three readings agree better"), ("replicates", "3")]);
    let act = lab.app.db.read(supernate::store::trail::head).unwrap().unwrap().0;
    lab.auditor().get("/history");
    let seen = lab.auditor().sees(&format!("/history/{act}"), "method version 1");
    let html = seen.html();
    assert!(html.contains("class=\"was\">2<") && html.contains("class=\"is\">3<"), "{html}");
    assert!(seen.text().contains("three readings agree better"), "{}", seen.text());
    assert!(!seen.text().contains('{'), "no raw document: {}", seen.text());
}
