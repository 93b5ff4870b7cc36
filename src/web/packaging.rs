//! Containers and labels of a lot: what is counted, each count, the reconciliation and its check.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::material_lot::typed_label;
use super::page::Shell;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::packaging::{CountKind, KINDS, NewCount, NewPackagingItem};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::packaging::{CountLine, PackagingItem};

pub const ROUTES: &[Route] = &[
    get("/lots/{id}/packaging", list),
    post("/lots/{id}/packaging", &[Act::CountPackaging], add),
    get("/packaging/{id}", item_page),
    post("/packaging/{id}/counts", &[Act::CountPackaging], count),
    post("/packaging/{id}/check", &[Act::CheckPackaging], check),
];

/// Where an item stands, in a few words.
fn state(item: &PackagingItem) -> String {
    match (item.facts.reconciliation(), item.facts.is_checked(), &item.check) {
        (None, _, _) => "nothing issued yet".to_string(),
        (Some(_), false, _) => "to be checked by a second person".to_string(),
        (Some(_), true, Some(check)) => match check.deviation {
            Some((_, number)) => format!("checked by {}, outside: deviation {number}", check.by),
            None => format!("checked by {}", check.by),
        },
        (Some(_), true, None) => String::new(),
    }
}

fn percent(item: &PackagingItem) -> Option<String> {
    item.facts.reconciliation().map(|found| {
        let out = if found.is_within { "" } else { ", outside its limits" };
        format!(
            "{}\u{202f}% ({} to {}\u{202f}%){out}",
            found.percent, item.facts.least_percent, item.facts.most_percent
        )
    })
}

fn list(visit: &Visit) -> Outcome {
    list_page(200, visit, None)
}

fn list_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let (lot, items) =
        visit.read(|reader| Ok((store::lot::get(reader, id)?, store::packaging::of_lot(reader, id)?)))?;
    let open = items.iter().filter(|item| !item.facts.is_checked()).count();
    let lead = match (items.is_empty(), open) {
        (true, _) => "Nothing is counted yet.".to_string(),
        (false, 0) => "All counts are reconciled and checked.".to_string(),
        (false, open) => format!("{open} of {} are not checked yet.", items.len()),
    };
    let empty = "Containers, closures and labels that are issued to this lot are named below and counted.";
    let heads = ["Item", "Kind", "Issued#", "Accounted for#", "Of what was issued", "State"];
    let table = Table::new("In the order they were added", &heads, empty).rows(items.iter().map(|item| {
        let found = item.facts.reconciliation();
        let count = |of: fn(&crate::domain::packaging::Reconciliation) -> i64| {
            Cell::number(found.as_ref().map_or(0, of).to_string())
        };
        vec![
            Cell::link(format!("/packaging/{}", item.id), &item.facts.name),
            Cell::text(&item.kind),
            count(|found| found.issued),
            count(|found| found.accounted),
            Cell::or_missing(percent(item), "nothing issued yet"),
            Cell::text(state(item)),
        ]
    }));
    let mut shell = Shell::of(visit, &format!("Containers and labels of {}", lot.number))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{id}"), &lot.number);
    let may_add = lot.decision.is_none() && visit.may(Act::CountPackaging);
    let form = match failed {
        Some(failed) => {
            shell = shell.with_errors(&failed);
            Some(failed)
        }
        None if may_add => Some(add_form(visit, id)?),
        None => None,
    };
    Record::new(shell, lead)
        .quiet_link_if(true, format!("/lots/{id}/label"), "Label of a packed container")
        .table("", table)
        .form("Count another item", "", form)
        .show_with(status)
}

fn add_form(visit: &Visit, lot: i64) -> Result<Form, Failure> {
    let limit =
        |name: &str, label: &str, value: &str| Field::new(name, label, Entry::Decimal).width(8).value(value);
    Ok(Form::new(visit, &format!("/lots/{lot}/packaging"), "Count it")?
        .field(Field::new("kind", "Kind", Entry::Select).choices(KINDS.map(|kind| (kind, kind))))
        .field(Field::new("name", "Name, with the version of a printed item", Entry::Text))
        .field(
            Field::new("material_lot", "Material lot, where it has one", Entry::Text)
                .width(20)
                .hint("Scan or type its number."),
        )
        .field(
            limit("least_percent", "Accounted for at least, %", "98.0").hint(
                "Of what was issued. 98 to 100 % is common practice for labels; the site's limits hold.",
            ),
        )
        .field(limit("most_percent", "Accounted for at most, %", "100.0")))
}

fn add(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        add_form(visit, id)?,
        |typed| {
            let (kind, name) = (typed.choice("kind"), typed.text("name", 120));
            let material_lot =
                typed_label(typed, "material_lot", "material lot", store::material_lot::by_scan);
            let rule = |label: &str| NumberRule::between(label, -1000, 1000).unit("%");
            let least = typed.decimal("least_percent", &rule("Accounted for at least"));
            let most = typed.decimal("most_percent", &rule("Accounted for at most"));
            Some(NewPackagingItem {
                kind: kind?,
                name: name?,
                material_lot: material_lot?.map(|one| one.facts.id),
                least_percent: least?.value,
                most_percent: most?.value,
            })
        },
        |actor, new| acts::packaging::add(visit.db(), actor, id, &new),
        |item| format!("/packaging/{item}"),
        |status, form| list_page(status, visit, Some(form)),
    )
}

fn item_page(visit: &Visit) -> Outcome {
    one(200, visit, None)
}

fn counts_table(lines: &[CountLine], visit: &Visit) -> Table {
    let heads = ["When", "What", "Count#", "Why", "By"];
    let empty = "Nothing is counted yet. Record what was issued, then what became of it.";
    Table::new("Oldest first; a corrected count is kept", &heads, empty).rows(lines.iter().map(|line| {
        let was = lines.iter().find(|one| Some(one.count.id) == line.supersedes);
        let count = match was {
            Some(was) => format!("{}, was {}", line.count.count, was.count.count),
            None => line.count.count.to_string(),
        };
        vec![
            Cell::text(show::instant(&line.at, visit.at.zone)),
            Cell::text(line.count.kind.words()),
            if line.count.is_superseded { Cell::Was(count) } else { Cell::number(count) },
            Cell::text(&line.why),
            Cell::text(&line.by),
        ]
    }))
}

fn one(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let (item, lines) = visit.read(|reader| {
        let item = store::packaging::get(reader, id)?;
        let all = store::packaging::counts(reader, item.lot)?;
        let lines: Vec<CountLine> =
            all.into_iter().filter(|(of, _)| *of == id).map(|(_, line)| line).collect();
        Ok((item, lines))
    })?;
    let facts = &item.facts;
    let mut shell = Shell::of(visit, &facts.name)
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{}", item.lot), &facts.lot_number)
        .crumb(format!("/lots/{}/packaging", item.lot), "Containers and labels");
    let may_count = !facts.is_decided && visit.may(Act::CountPackaging);
    let may_check = facts.reconciliation().is_some() && !facts.is_checked() && !facts.is_decided;
    let mut count_form = if may_count { Some(counting(visit, id, &lines)?) } else { None };
    let mut check_form =
        if may_check && visit.may(Act::CheckPackaging) { Some(checking(visit, id)?) } else { None };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        let place = if failed.action.ends_with("/check") { &mut check_form } else { &mut count_form };
        *place = Some(failed);
    }
    let lead = match percent(&item) {
        Some(percent) => format!("Accounted for: {percent}. {}.", super::failure::capital(&state(&item))),
        None => "Nothing is issued yet.".to_string(),
    };
    let material_lot =
        item.material_lot.as_ref().map_or("none stated".to_string(), |(_, number)| number.clone());
    let deviation = item.check.as_ref().and_then(|check| check.deviation);
    Record::new(shell, lead)
        .fact("Lot", &facts.lot_number)
        .fact("Kind", &item.kind)
        .fact("Material lot", material_lot)
        .quiet_link_if(
            deviation.is_some(),
            format!("/deviations/{}", deviation.unwrap_or_default().0),
            "The deviation it opened",
        )
        .table("Counts", counts_table(&lines, visit))
        .form("Record a count", "", count_form)
        .form(
            "Check the reconciliation",
            "By a second person who did not count. Outside its limits it opens a deviation.",
            check_form,
        )
        .show_with(status)
}

fn counting(visit: &Visit, id: i64, lines: &[CountLine]) -> Result<Form, Failure> {
    let standing = lines.iter().filter(|line| !line.count.is_superseded);
    let choices = standing.map(|line| {
        (line.count.id.to_string(), format!("{} {}, {}", line.count.kind.words(), line.count.count, line.by))
    });
    Ok(Form::new(visit, &format!("/packaging/{id}/counts"), "Record the count")?
        .field(
            Field::new("kind", "What", Entry::Radios)
                .choices(CountKind::ALL.map(|kind| (kind.words(), super::failure::capital(kind.words())))),
        )
        .field(Field::new("count", "Count", Entry::Count).width(8))
        .field(Field::new("supersedes", "In place of, where it corrects one", Entry::Select).choices(choices))
        .field(Field::new("why", "Why, where it corrects one", Entry::Text)))
}

fn typed_count(typed: &mut Typed<'_>) -> Option<NewCount> {
    let (kind, count) = (typed.choice("kind"), typed.count("count", -100_000_000, 100_000_000));
    let (supersedes, why) = (typed.maybe_record("supersedes"), typed.maybe_text("why", 400));
    Some(NewCount {
        kind: CountKind::from_words(&kind?)?,
        count: count?,
        supersedes: supersedes?,
        why: why?.unwrap_or_default(),
    })
}

fn count(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lines = visit.read(|reader| {
        let lot = store::packaging::get(reader, id)?.lot;
        let all = store::packaging::counts(reader, lot)?;
        Ok(all.into_iter().filter(|(of, _)| *of == id).map(|(_, line)| line).collect::<Vec<_>>())
    })?;
    form::submit(
        visit,
        counting(visit, id, &lines)?,
        typed_count,
        |actor, new| acts::packaging::count(visit.db(), actor, id, &new),
        |_| format!("/packaging/{id}"),
        |status, form| one(status, visit, Some(form)),
    )
}

fn checking(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/packaging/{id}/check"), "I worked it out and agree")?.quiet())
}

fn check(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        checking(visit, id)?,
        |_| Some(()),
        |actor, ()| acts::packaging::check(visit.db(), actor, id),
        |deviation| match deviation {
            Some(deviation) => format!("/deviations/{deviation}"),
            None => format!("/packaging/{id}"),
        },
        |status, form| one(status, visit, Some(form)),
    )
}
