//! Accounts, sign-in and sessions.

use crate::support::{Lab, PASSWORD, Scratch, form_body, post_request, start};

#[test]
fn a_person_signs_in_and_out_and_the_old_cookie_is_worth_nothing() {
    let lab = Lab::new();
    let token = lab.analyst().token();
    assert_eq!(lab.get_with("/me", Some(&token)).status, 200);
    lab.analyst().does("/me", "/sign-out", &[]);
    let after = lab.get_with("/me", Some(&token));
    assert_eq!((after.status, after.location.as_deref()), (303, Some("/sign-in?next=%2Fme")));
}

#[test]
fn a_wrong_password_an_unknown_name_and_a_disabled_account_get_the_same_answer() {
    let lab = Lab::new();
    lab.administrator().does("/people/5", "/people/5/state", &[("why", "left the company today")]);
    let mut answers = Vec::new();
    for (name, password) in
        [("ilse.brandt", "not the password at all"), ("no.body", PASSWORD), ("tomas.reyle", "x")]
    {
        let seen = lab.send(post_request(
            "/sign-in",
            form_body(&[("user_name", name), ("password", password)]),
            None,
        ));
        answers.push((seen.status, seen.text().replace(name, "")));
    }
    assert_eq!(answers[0], answers[1]);
    assert_eq!(answers[1], answers[2]);
    assert_eq!(answers[0].0, 409);
}

#[test]
fn after_five_failures_even_the_right_password_waits() {
    let lab = Lab::new();
    let tries = |password: &str| {
        let body = form_body(&[("user_name", "ilse.brandt"), ("password", password), ("next", "")]);
        lab.send(post_request("/sign-in", body, None)).status
    };
    for _ in 0..5 {
        assert_eq!(tries("wrong wrong wrong"), 409);
    }
    assert_eq!(tries(PASSWORD), 409);
    lab.later_minutes(1);
    assert_eq!(tries(PASSWORD), 303);
    lab.administrator().sees("/history", "reported repeated failed passwords");
}

#[test]
fn an_idle_session_ends_and_a_disabled_person_is_out_at_once() {
    let lab = Lab::new();
    let token = lab.analyst().token();
    lab.later_minutes(29);
    assert_eq!(lab.get_with("/me", Some(&token)).status, 200);
    lab.later_minutes(31);
    assert_eq!(lab.get_with("/me", Some(&token)).status, 303);

    let token = lab.analyst().token();
    let id = lab.actor("rafe.tolland").account;
    let page = format!("/people/{id}");
    lab.administrator().does(&page, &format!("{page}/state"), &[("why", "left the company today")]);
    assert_eq!(lab.get_with("/me", Some(&token)).status, 303);
}

#[test]
fn a_preset_cookie_never_becomes_a_session() {
    let lab = Lab::new();
    let preset = "0123456789abcdef0123456789abcdef";
    let mut request = post_request(
        "/sign-in",
        form_body(&[("user_name", "ilse.brandt"), ("password", PASSWORD)]),
        Some(preset),
    );
    request.headers_mut().insert("x-story", "fixation".parse().unwrap());
    assert_eq!(lab.send(request).status, 303);
    assert_eq!(lab.get_with("/me", Some(preset)).status, 303);
}

#[test]
fn the_first_administrator_comes_with_a_code_that_works_once() {
    let folder = Scratch::new();
    let at = supernate::domain::moment::Moment::new(start(), chrono_tz::Europe::London);
    let console = supernate::domain::actor::Actor::console(at);
    let path = folder.0.join("supernate.sqlite");
    let db =
        supernate::store::door::Db::open(&path, &console, supernate::store::door::Durability::Off).unwrap();
    let site = supernate::store::site::Site {
        name: "Our site".to_string(),
        zone: chrono_tz::Europe::London,
        is_demo: false,
    };
    supernate::acts::site::set_up(&db, &console, &site).unwrap();
    assert!(!db.read(supernate::store::account::has_people).unwrap(), "no default account");
    let code = supernate::acts::account::issue_first_code(&db, &console).unwrap();
    drop(db);

    let lab = Lab::over(folder);
    let fields = [
        ("code", code.as_str()),
        ("user_name", "nell.farrow"),
        ("full_name", "Nell Farrow"),
        ("identity_verified_by", "staff card, seen by the owner"),
        ("password", PASSWORD),
        ("password_again", PASSWORD),
    ];
    assert_eq!(lab.send(post_request("/code", form_body(&fields), None)).status, 303);
    let again = lab.send(post_request("/code", form_body(&[fields[0], fields[4], fields[5]]), None));
    assert_eq!(again.status, 409);
    assert!(again.text().contains("used, expired or unknown"));
    lab.administrator().sees("/people", "Nell Farrow");
}

#[test]
fn an_administrator_makes_an_account_and_never_sees_its_password() {
    let lab = Lab::new();
    let page = lab.administrator().submits(
        "/people/new",
        "/people/new",
        &[
            ("user_name", "kit.hale"),
            ("full_name", "Kit Hale"),
            ("identity_verified_by", "N. Farrow, passport"),
            ("role.analyst", "yes"),
        ],
    );
    let text = page.text();
    let code =
        text.split_whitespace().find(|word| word.matches('-').count() > 4).expect("a code").to_string();
    let fields = [("code", code.as_str()), ("password", PASSWORD), ("password_again", PASSWORD)];
    assert_eq!(lab.send(post_request("/code", form_body(&fields), None)).status, 303);
    lab.person("kit.hale").sees("/me", "analyst");
}

#[test]
fn wrong_account_data_comes_back_with_every_value_and_a_sentence() {
    let lab = Lab::new();
    let seen = lab.administrator().submits(
        "/people/new",
        "/people/new",
        &[("user_name", "rafe.tolland"), ("full_name", "Somebody Else"), ("role.analyst", "yes")],
    );
    assert_eq!(seen.status, 409);
    assert!(seen.title().starts_with("Error: "));
    assert!(seen.text().contains("A name is never used again"));
    assert!(seen.html().contains("value=\"Somebody Else\""));
}

#[test]
fn a_person_without_the_role_is_told_who_may_and_the_attempt_stays_in_the_history() {
    let lab = Lab::new();
    let seen = lab.analyst().get("/people/new");
    assert_eq!(seen.status, 403);
    assert!(seen.text().contains("administrator"));
    let id = lab.actor("ilse.brandt").account;
    let mut pairs = lab.analyst().get("/me").form("/sign-out");
    pairs.push(("why".to_string(), "because I can do it".to_string()));
    pairs.push(("state".to_string(), "disabled".to_string()));
    let refused = lab.analyst().posts(&format!("/people/{id}/state"), &pairs);
    assert_eq!(refused.status, 403, "{}", refused.text());
    lab.auditor().sees("/history", "disabled an account — refused");
}

#[test]
fn an_unknown_or_doubled_field_is_refused() {
    let lab = Lab::new();
    let person = lab.administrator();
    let seen = person.submits("/people/new", "/people/new", &[("is_admin", "1")]);
    assert_eq!(seen.status, 400, "{}", seen.text());
    let body = "user_name=a&user_name=b".to_string();
    assert_eq!(lab.send(post_request("/people/new", body, Some(&person.token()))).status, 400);
}

#[test]
fn a_form_of_another_origin_or_another_session_is_refused() {
    let lab = Lab::new();
    let person = lab.analyst();
    let pairs = person.get("/me").form("/me/password");
    let mut foreign = post_request("/me/password", form_body(&pairs), Some(&person.token()));
    foreign.headers_mut().insert("sec-fetch-site", "cross-site".parse().unwrap());
    assert_eq!(lab.send(foreign).status, 400);
    let other = lab.second_analyst().token();
    assert_eq!(lab.send(post_request("/me/password", form_body(&pairs), Some(&other))).status, 400);
}

#[test]
fn the_administrator_sets_the_idle_time_within_its_bounds() {
    let lab = Lab::new();
    let wrong = lab.administrator().submits(
        "/settings",
        "/settings",
        &[("session.idle-minutes", "45"), ("reason", "the tablets are in a locked room")],
    );
    assert_eq!(wrong.status, 409);
    assert!(wrong.text().contains("45 is outside 5 to 30"), "{}", wrong.text());
    lab.administrator().does(
        "/settings",
        "/settings",
        &[("session.idle-minutes", "10"), ("reason", "the tablets are in a locked room")],
    );
    let token = lab.analyst().token();
    lab.later_minutes(11);
    assert_eq!(lab.get_with("/me", Some(&token)).status, 303);
    assert_eq!(lab.manager().get("/settings").status, 403);
}

#[test]
fn the_administrator_confirms_the_clock() {
    let lab = Lab::new();
    lab.administrator().does(
        "/settings/clock",
        "/settings/clock",
        &[("reason", "compared with the radio clock in the hall")],
    );
    lab.auditor().sees("/history", "confirmed the clock: it shows 1 Dec 2026, 09:00 (+00:00)");
}
