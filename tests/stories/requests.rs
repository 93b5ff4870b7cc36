//! What no page of ours sends is refused at every POST: another origin, no token, fields of its own, no role.

use axum::body::Body;
use axum::http::{Request, header};
use supernate::domain::method::TestKind;
use supernate::domain::version::Versioned;
use supernate::store::trail;
use supernate::web::route::{self, Access, Route};

use crate::attachments::{photo, uploads};
use crate::support::batches::Floor;
use crate::support::{Lab, ORIGIN, PEOPLE, form_body, post_request, world};

/// A laboratory in which the first record of every kind exists.
fn filled() -> Lab {
    let lab = Lab::new();
    crate::investigations::opened(&lab);
    let study = world::study(&lab, "TW-104-0640", &[TestKind::Ph, TestKind::Redispersibility]);
    world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    uploads(&lab.analyst(), "/files/sample/1", "bed.png", &photo(60, 120));
    lab
}

/// The route's path with the numbers of records that exist.
fn path(route: &Route) -> String {
    let fill = |part: &str| match part {
        "{kind}" => "sample".to_string(),
        "{event}" => "calibration".to_string(),
        "{digest}" => "0".repeat(64),
        part if part.starts_with('{') && route.path.starts_with("/people") => "6".to_string(),
        part if part.starts_with('{') => "1".to_string(),
        part => part.to_string(),
    };
    route.path.split('/').map(fill).collect::<Vec<_>>().join("/")
}

fn posts() -> Vec<Route> {
    route::all().into_iter().filter(|route| route.is_post).collect()
}

/// A person whose roles permit one of the route's acts, or do not.
fn person_who(lab: &Lab, route: &Route, may: bool) -> Option<&'static str> {
    let permits = |name: &str| {
        let roles = lab.actor(name).roles;
        route.acts.iter().any(|act| act.role_for(&roles).is_some())
    };
    PEOPLE.iter().map(|(name, _, _)| *name).find(|name| permits(name) == may)
}

fn own_fields(lab: &Lab, name: &str) -> Vec<(String, String)> {
    let mut fields = lab.person(name).get("/me").form("/sign-out");
    fields.retain(|(name, _)| name == "form_token");
    fields
}

fn head(lab: &Lab) -> i64 {
    lab.app.db.read(trail::head).unwrap().unwrap().0
}

/// sec_S40: of the ways a browser can say where a form came from, only our own pages pass, at every POST.
#[test]
fn sec_s40_only_forms_of_our_own_pages_are_read() {
    let lab = filled();
    let foreign = "This form did not come from a page of this program.";
    let ways: [(&[(&str, &str)], bool); 7] = [
        (&[("sec-fetch-site", "same-origin")], true),
        (&[("origin", ORIGIN)], true),
        (&[("sec-fetch-site", "same-site"), ("origin", ORIGIN)], false),
        (&[("sec-fetch-site", "cross-site"), ("origin", ORIGIN)], false),
        (&[("sec-fetch-site", "none")], false),
        (&[("origin", "null")], false),
        (&[], false),
    ];
    let mut cells = 0;
    for route in posts() {
        let name = person_who(&lab, &route, true).unwrap_or("nell.farrow");
        let token = lab.person(name).token();
        let before = head(&lab);
        for (headers, passes) in ways {
            let mut request = Request::builder()
                .method("POST")
                .uri(path(&route))
                .header(header::CONTENT_TYPE, "application/x-www-form-urlencoded")
                .header(header::COOKIE, format!("__Host-sid={token}"));
            for (header, value) in headers {
                request = request.header(*header, *value);
            }
            let seen = lab.send(request.body(Body::from("surplus=1")).unwrap());
            let is_foreign = seen.status == 400 && seen.text().contains(foreign);
            assert_eq!(is_foreign, !passes, "{} {headers:?}: {}", route.path, seen.text());
            assert!(seen.status >= 400, "without its token nothing is done: {}", route.path);
            cells += 1;
        }
        assert_eq!(head(&lab), before, "{} wrote something", route.path);
    }
    assert_eq!(cells, posts().len() * 7);
}

/// A route, an address of it at which its act is possible now, and the fields it is asked for by.
type Open = (&'static str, String, Vec<(&'static str, String)>);

/// Where a route refuses by its record's state first, a record that is open for it.
fn where_something_is_open(lab: &Lab) -> Vec<Open> {
    let mut open = Vec::new();
    for (person, noun, route) in [
        (lab.formulator(), "formulations", "/formulation-versions/{id}/edit"),
        (lab.manager(), "methods", "/method-versions/{id}/edit"),
        (lab.manager(), "specifications", "/specification-versions/{id}/edit"),
    ] {
        let draft = format!("/{noun}/1/draft");
        let made = person.does(&draft, &draft, &[("reason", "one more version for this story")]);
        open.push((route, format!("{}/edit", made.location.unwrap()), Vec::new()));
    }
    let reason = [("reason", "one more age is needed")];
    // A second version is approved, so that the study can be amended to it; the third stays a draft.
    let second = lab.manager().does("/protocols/1", "/protocols/1/draft", &reason).location.unwrap();
    let second = second.split(['/', '?']).nth(2).unwrap().parse().unwrap();
    world::approve(lab, Versioned::Protocol, second, "maren.oddy", "ada.whitlock");
    let made = lab.manager().does("/protocols/1", "/protocols/1/draft", &reason).location.unwrap();
    let page = made.split(['/', '?']).take(3).collect::<Vec<_>>().join("/");
    open.push(("/protocol-versions/{id}/arms", format!("{page}/arms"), Vec::new()));
    open.push(("/protocol-versions/{id}/matrix", format!("{page}/matrix"), Vec::new()));
    let named = [("code", "M-LOOK"), ("name", "Look of the bottle")];
    let made = lab.manager().does("/methods/new?kind=appearance", "/methods/new", &named).location.unwrap();
    open.push(("/method-versions/{id}/photos", format!("{made}/photos"), Vec::new()));
    open.push(("/methods/new", "/methods/new".to_string(), vec![("kind", "ph".to_string())]));
    let lot = lab.app.db.read(|reader| supernate::store::study::get(reader, 1)).unwrap().lot.to_string();
    let study = vec![("lot", lot), ("protocol_version", "1".to_string())];
    open.push(("/studies/new/check", "/studies/new/check".to_string(), study));
    let pull = world::pull(lab, 1, 1, "Initial");
    open.push(("/samples/{id}/stages", format!("/samples/{}/stages", pull.sample), Vec::new()));
    let about = lab.reviewer().get("/review/1").form("/review/1/answers");
    let about = about.into_iter().find(|(name, _)| name == "about").unwrap().1;
    open.push(("/review/{id}/answers", "/review/1/answers".to_string(), vec![("about", about)]));
    let held = crate::imports::upload(&lab.manager(), "zno.csv", &crate::imports::zno()).location.unwrap();
    let held = held.split('?').next().unwrap().to_string();
    open.push(("/imports/held/{digest}", held, Vec::new()));
    open.extend(what_a_lot_is_made_from(lab));
    open.extend(a_lot_in_the_making(lab));
    let typed = [("code", "R-1"), ("title", "Two gums"), ("started_on", "1 Dec 2026")];
    let rack = lab.formulator().does("/rack/new", "/rack/new", &typed).location.unwrap();
    open.push(("/rack/{id}/lots", format!("{rack}/lots"), Vec::new()));
    let arm = vec![("arm", pull.study_arm.to_string())];
    open.push(("/conclusions/new", "/conclusions/new".to_string(), arm));
    open
}

/// A record in the making: its first substance is weighed, to be weighed again by a second person. And the draft of
/// another master record.
fn a_lot_in_the_making(lab: &Lab) -> Vec<Open> {
    let product = world::product(lab, "TW-905");
    let floor = Floor::of(lab, product, world::presentation(lab, product, "TW-905-100"));
    let record = floor.starts("TW-905-0001");
    floor.begins(&record, 1);
    let balance = floor.balance.to_string();
    let weighed = [("material_lot", "ML-1"), ("balance", balance.as_str()), ("net", "41.44")];
    floor.does(&lab.operator(), &record, 1, "weighing", &weighed);
    floor.does(&lab.operator(), &record, 1, "end", &[]);
    let (entry, _) = floor.second_form(&lab.manager(), &record);
    let step = |number: usize, what: &str| format!("{record}/steps/{number}/{what}");
    let mut open: Vec<Open> = Vec::new();
    let mut at = |route: &'static str, path: String| open.push((route, path, Vec::new()));
    at("/batches/{id}/steps/{step}/start", step(2, "start"));
    at("/batches/{id}/steps/{step}/weighing", step(1, "weighing"));
    at("/batches/{id}/steps/{step}/values/{value}", step(3, "values/1"));
    at("/batches/{id}/steps/{step}/stop", step(7, "stop"));
    at("/batches/{id}/steps/{step}/resume", step(7, "resume"));
    at("/batches/{id}/steps/{step}/note", step(1, "note"));
    at("/batches/{id}/steps/{step}/answers/{entry}", step(1, &format!("answers/{entry}")));
    at("/batches/{id}/steps/{step}/end", step(1, "end"));
    at("/batches/{id}/steps/{step}/skip", step(2, "skip"));
    at("/batches/{id}/steps/{step}/repeat", step(3, "repeat"));
    at("/batches/{id}/steps/{step}/check", step(1, "check"));
    at("/batches/{id}/steps/{step}/second/{entry}", step(1, &format!("second/{entry}")));
    at("/batches/{id}/steps/{step}/entries/{entry}", step(1, &format!("entries/{entry}")));
    at("/batches/{id}/yields/{phase}", format!("{record}/yields/2"));
    at("/batches/{id}/yields/{phase}/check", format!("{record}/yields/2/check"));
    at("/batches/{id}/close", format!("{record}/close"));
    let formulations = lab.app.db.read(|reader| {
        Ok(supernate::store::version::get(reader, Versioned::Formulation, floor.version)?.parent)
    });
    let draft = format!("/formulations/{}/draft", formulations.unwrap());
    let reason = [("reason", "a larger batch")];
    let made = lab.formulator().does(&draft, &draft, &reason).location.unwrap();
    let version = made.split(['/', '?']).take(3).collect::<Vec<_>>().join("/");
    at("/formulation-versions/{id}/master", format!("{version}/master"));
    at("/formulation-versions/{id}/phases/{phase}", format!("{version}/phases/1"));
    at("/formulation-versions/{id}/phases/{phase}/steps/{step}", format!("{version}/phases/1/steps/1"));
    open
}

/// A delivery, a vessel, a deviation, a counted label and a retain, each open.
fn what_a_lot_is_made_from(lab: &Lab) -> Vec<Open> {
    let material = world::material(lab, "M-77", "kaolin", "suspending agent");
    let delivery = world::material_lot(lab, material, "ML-0077", "25", "2028-12-01");
    let vessel = world::clean_equipment(lab, "V-77", "mixing vessel");
    let what = [("title", "Seal broken"), ("described", "One drum came with a broken seal today.")];
    let page = format!("/deviations/new?material_lot={delivery}");
    let deviation = lab.operator().does(&page, "/deviations/new", &what).location.unwrap();
    let lot = lab.app.db.read(|reader| supernate::store::study::get(reader, 1)).unwrap().lot;
    let page = format!("/lots/{lot}/packaging");
    let item = lab.operator().does(&page, &page, &[("kind", "label"), ("name", "label 3")]).location.unwrap();
    let page = format!("/lots/{lot}/retains/new");
    let kept = [
        ("containers", "4"),
        ("quantity", "800"),
        ("unit", "mL"),
        ("test_quantity", "400"),
        ("location", "retain room"),
    ];
    let retain = lab.operator().does(&page, &page, &kept).location.unwrap();
    let maren = lab.actor("maren.oddy").account.to_string();
    let given = [("purpose", "weighing of kaolin"), ("issued_to", maren.as_str())];
    let sheet = lab.manager().does("/blank-sheets/new", "/blank-sheets/new", &given).location.unwrap();
    let at = |route: &'static str, path: String| (route, path, Vec::new());
    vec![
        at("/material-lots/{id}/status", format!("/material-lots/{delivery}/status")),
        at("/material-lots/{id}/assay", format!("/material-lots/{delivery}/assay")),
        at("/material-lots/{id}/stock", format!("/material-lots/{delivery}/stock")),
        at("/equipment/{id}/{event}", format!("/equipment/{vessel}/cleaned")),
        at("/deviations/{id}/entries", format!("{deviation}/entries")),
        at("/packaging/{id}/counts", format!("{item}/counts")),
        at("/packaging/{id}/check", format!("{item}/check")),
        at("/blank-sheets/{id}/events", format!("{sheet}/events")),
        at("/retains/{id}/events", format!("{retain}/events")),
    ]
}

/// sec_S53: a field that the form does not have is refused, whoever sends it, and nothing is written.
#[test]
fn sec_s53_a_field_of_ones_own_is_refused_at_every_post() {
    let lab = filled();
    let known = where_something_is_open(&lab);
    let mut let_through = Vec::new();
    for route in posts().into_iter().filter(|route| route.access != Access::Public) {
        let Some(name) = person_who(&lab, &route, true) else { continue };
        let mut fields = own_fields(&lab, name);
        let mut path = path(&route);
        if let Some((_, open, more)) = known.iter().find(|(known, _, _)| *known == route.path) {
            path.clone_from(open);
            fields.extend(more.iter().map(|(name, value)| (name.to_string(), value.clone())));
        }
        fields.push(("account".to_string(), "1".to_string()));
        fields.push(("created_at".to_string(), "2020-01-01".to_string()));
        let before = head(&lab);
        let seen = lab.person(name).posts(&path, &fields);
        if seen.status != 400 || head(&lab) != before {
            let_through.push(format!("{} as {name}: {} {}", route.path, seen.status, seen.text()));
        }
    }
    assert!(let_through.is_empty(), "{}", let_through.join("\n"));
}

/// sec_S50, requirement P4: every POST by every person whose roles do not permit it is a 403 page, and the attempt is
/// a refused act in the trail.
#[test]
fn sec_s50_every_post_without_the_role_is_denied_and_noted() {
    let lab = filled();
    let mut cells = 0;
    for route in posts().into_iter().filter(|route| route.access != Access::Public) {
        for (name, _, roles) in PEOPLE {
            if route.acts.iter().any(|act| act.role_for(roles).is_some()) {
                continue;
            }
            let body = form_body(&own_fields(&lab, name));
            let token = lab.person(name).token();
            let before = head(&lab);
            let seen = lab.send(post_request(&path(&route), body, Some(&token)));
            assert_eq!(seen.status, 403, "{} as {name}: {}", route.path, seen.text());
            assert!(seen.text().contains("needs one of these roles"), "{}", seen.text());
            let newest = lab.app.db.read(|reader| trail::before(reader, None, 1)).unwrap().remove(0);
            assert_eq!((newest.act, newest.outcome.as_str()), (before + 1, "denied"), "{}", route.path);
            assert!(route.acts.iter().any(|act| act.code() == newest.code) && newest.user_name == name);
            cells += 1;
        }
    }
    assert!(cells > 300, "{cells} cells");
}
