//! Containers that are never opened: weighed at loading, then weighed, measured and photographed at each age.

use supernate::acts;
use supernate::acts::protocol::NewProtocol;
use supernate::acts::version::Written;
use supernate::domain::method::TestKind;
use supernate::domain::protocol::{Programme, ProtocolContent};
use supernate::domain::version::Versioned;
use supernate::store;

use super::verification::verify;
use crate::attachments::photo;
use crate::support::{Lab, world};

/// A study whose arms each keep one container that is never opened; answers with that container of the first arm.
fn with_followed(lab: &Lab) -> (i64, store::container::Container) {
    let db = &lab.app.db;
    let presentation = world::first_presentation(lab);
    let new = NewProtocol {
        presentation,
        code: "SP-104".to_string(),
        title: "Primary stability".to_string(),
        programme: Programme::Primary,
        specification_version: world::approved_specification(lab, presentation, &[TestKind::Ph]),
    };
    let manager = lab.actor("maren.oddy");
    let id = acts::protocol::add(db, &manager, &new).unwrap();
    let version = db.read(|reader| store::version::get(reader, Versioned::Protocol, id)).unwrap();
    let mut content: ProtocolContent = version.read().unwrap();
    assert!(!version.content.contains("follow_through"), "a protocol without them keeps its document");
    content.follow_through_containers = 1;
    let written = Written {
        reason: "one bottle of each arm is followed".to_string(),
        content: acts::protocol::written(&content).unwrap(),
    };
    acts::version::rewrite(db, &manager, Versioned::Protocol, id, &written, &version.digest()).unwrap();
    world::approve(lab, Versioned::Protocol, id, "maren.oddy", "ada.whitlock");
    let study = world::study(lab, "TW-104-0640", &[TestKind::Ph]);
    let all = db.read(|reader| store::container::of_study(reader, study)).unwrap();
    (study, all.into_iter().find(|one| one.purpose == "follow-through").unwrap())
}

/// Decision A3: the loss is counted from the weight at loading; corrections are was and is.
#[test]
fn a_followed_container_is_weighed_at_loading_and_at_each_age() {
    let lab = Lab::new();
    let (study, container) = with_followed(&lab);
    lab.manager().sees(&format!("/studies/{study}"), &container.label);
    lab.manager().sees("/protocol-versions/1", "1 followed unopened in each arm");
    let (path, action) =
        (format!("/containers/{}", container.id), format!("/containers/{}/observations", container.id));
    let analyst = lab.analyst();
    let initial = world::pull(&lab, study, 1, "Initial").id.to_string();
    let early = analyst.submits(&path, &action, &[("age", &initial), ("weight_g", "251.00")]);
    assert_eq!(early.status, 409, "{}", early.text());
    assert!(early.text().contains("The weight at loading comes first"), "{}", early.text());
    let wrong =
        analyst.submits(&path, &action, &[("age", "loading"), ("weight_g", "heavy"), ("bed_top_mm", "x")]);
    assert_eq!(wrong.status, 422);
    assert!(wrong.text().contains("“heavy” is not a number") && wrong.text().contains("“x” is not a number"));
    analyst.does(&path, &action, &[("age", "loading"), ("weight_g", "252.00"), ("fill_line_mm", "102")]);

    let three = world::pull(&lab, study, 1, "3 months").id.to_string();
    let high =
        [("age", three.as_str()), ("weight_g", "249.00"), ("bed_top_mm", "103"), ("fill_line_mm", "102")];
    let refused = analyst.submits(&path, &action, &high);
    assert!(refused.text().contains("lies above the fill line"), "{}", refused.text());
    let at_three =
        [("age", three.as_str()), ("weight_g", "249.00"), ("bed_top_mm", "61.5"), ("fill_line_mm", "102")];
    let seen = analyst.does(&path, &action, &at_three);
    for words in
        ["At loading 252.00 g", "3 months 249.00 g 1.19 % bed 61.5 mm of 102 mm", "3 months: 249.00 g"]
    {
        assert!(seen.text().contains(words) || words.starts_with("3 months:"), "{words}: {}", seen.text());
    }
    let again = analyst.submits(&path, &action, &[("age", &three), ("weight_g", "248.00")]);
    assert_eq!(again.status, 409, "{}", again.text());
    let why = [("age", three.as_str()), ("weight_g", "248.00"), ("why", "read off the wrong balance")];
    let corrected = analyst.does(&path, &action, &why);
    assert!(corrected.text().contains("was 249.00 g: read off the wrong balance"), "{}", corrected.text());
    assert!(corrected.text().contains("1.59 %"), "{}", corrected.text());
    lab.auditor().sees("/history", "3 months: 248.00 g, was 249.00 g");
    assert!(corrected.text().contains("bed 61.5 mm of 102 mm"), "the heights stay: {}", corrected.text());
    assert_eq!(verify(&lab.folder.0, None).findings, []);
}

/// It is never opened, and only such a container is followed.
#[test]
fn a_followed_container_is_never_taken_for_a_pull() {
    let lab = Lab::new();
    let (study, container) = with_followed(&lab);
    let pull = world::pull(&lab, study, 1, "Initial");
    let page = format!("/pulls/{}", pull.id);
    let fields = [("container.1", container.label.as_str()), ("why", "taken for this story")];
    let refused = lab.analyst().submits(&page, &format!("{page}/take"), &fields);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("is followed unopened through all ages"), "{}", refused.text());
    let plain = lab.app.db.read(|reader| store::container::of_study(reader, study)).unwrap()[0].id;
    let html = lab.analyst().get(&format!("/containers/{plain}")).html();
    assert!(!html.contains("/observations"), "{html}");
    let new = supernate::domain::follow_through::NewObservation {
        pull: None,
        weight_g: 250.into(),
        bed_top_mm: None,
        fill_line_mm: None,
        why: String::new(),
    };
    let actor = lab.actor("rafe.tolland");
    let other = acts::follow_through::observe(&lab.app.db, &lab.folder.0, &actor, plain, &new, None);
    assert!(other.unwrap_err().to_string().contains("Only a follow-through container"));
}

/// The photograph is kept with the pull of its age.
#[test]
fn a_photo_of_a_followed_container_is_kept() {
    let lab = Lab::new();
    let (_, container) = with_followed(&lab);
    let path = format!("/containers/{}", container.id);
    let db = &lab.app.db;
    let png = photo(30, 60);
    let new = supernate::domain::follow_through::NewObservation {
        pull: None,
        weight_g: 250.into(),
        bed_top_mm: None,
        fill_line_mm: None,
        why: String::new(),
    };
    let actor = lab.actor("rafe.tolland");
    let pdf: (&str, &[u8]) = ("a.pdf", b"%PDF-1.7 %%EOF");
    assert!(acts::follow_through::observe(db, &lab.folder.0, &actor, container.id, &new, Some(pdf)).is_err());
    let bed = ("bed.png", png.as_slice());
    acts::follow_through::observe(db, &lab.folder.0, &actor, container.id, &new, Some(bed)).unwrap();
    let seen = lab.analyst().get(&path);
    assert!(seen.links().contains(&"/attachments/1".to_string()), "{:?}", seen.links());
    lab.analyst().sees("/attachments/1", &format!("{}, at loading", container.label));
}
