//! The formulator's rack: development lots side by side.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::part::Trail;
use super::record::Record;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::rack::{Look, NewRack, PLACES, Standing, rank};
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::report::cylinder::{Cylinder, Strip};
use crate::store;
use crate::store::rack::{Rack, RackLot};

pub const ROUTES: &[Route] = &[
    get("/rack", list),
    get("/rack/new", new_page),
    post("/rack/new", &[Act::StartRack], start),
    get("/rack/{id}", one),
    post("/rack/{id}/lots", &[Act::PutOnRack], put),
];

const LEAD: &str = "Development lots that begin on one day and are looked at side by side. Nothing on a \
                    rack takes part in an official evaluation.";

fn list(visit: &Visit) -> Outcome {
    let racks = visit.read(store::rack::all)?;
    let rows = racks.iter().map(|rack| {
        vec![
            Cell::link(format!("/rack/{}", rack.id), rack.code.clone()),
            Cell::text(&rack.title),
            Cell::text(date_shown(rack.started_on)),
            Cell::number(format!("{} of {PLACES}", rack.lots)),
            Cell::text(&rack.put_up_by),
        ]
    });
    let heads = ["Rack", "About", "Time zero", "Lots#", "Put up by"];
    let empty = "No rack is put up yet. A formulator puts one up, then places laboratory lots on it.";
    Record::new(Shell::of(visit, "Rack").crumb("/formulations", "Formulations"), LEAD)
        .link_if(visit.may(Act::StartRack), "/rack/new", "Put up a rack")
        .table("Racks", Table::new("The newest first", &heads, empty).rows(rows))
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::Formulator], Act::StartRack)?;
    Ok(Form::new(visit, "/rack/new", "Put up the rack")?
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Never used twice."))
        .field(Field::new("title", "What it is to show", Entry::Text))
        .field(
            Field::new("started_on", "Time zero of all its lots", Entry::Date)
                .width(12)
                .value(date_shown(visit.at.date())),
        ))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "New rack", LEAD, new_form(visit)?)
}

fn start(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "New rack",
        LEAD,
        new_form(visit)?,
        |typed| {
            let (code, title, started_on) =
                (typed.text("code", 20), typed.text("title", 120), typed.date("started_on"));
            Some(NewRack { code: code?, title: title?, started_on: started_on? })
        },
        |actor, new| acts::rack::start(visit.db(), actor, &new),
        |id| format!("/rack/{id}"),
    )
}

#[derive(Template)]
#[template(path = "rack/rack.html")]
struct RackPage {
    shell: Shell,
    lead: String,
    ranking: Table,
    /// Heading, formulation and cylinders of each lot, best first.
    lots: Vec<(String, String, Option<Strip>)>,
    form: Option<Form>,
    trail: Trail,
}

fn put_form(visit: &Visit, rack: &Rack) -> Result<Form, Failure> {
    let free = visit.read(store::rack::free_lots)?;
    Ok(Form::new(visit, &format!("/rack/{}/lots", rack.id), "Put it on the rack")?
        .field(
            Field::new("lot", "Laboratory lot", Entry::Select)
                .choices(free.into_iter().map(|(id, number)| (id.to_string(), number)))
                .hint("Lots of laboratory scale that stand on no rack."),
        )
        .quiet())
}

fn one(visit: &Visit) -> Outcome {
    let rack = visit.read(|reader| store::rack::get(reader, visit.id("id")?))?;
    let form = if visit.may(Act::PutOnRack) { Some(put_form(visit, &rack)?) } else { None };
    shown(200, visit, &rack, form)
}

fn shown(status: u16, visit: &Visit, rack: &Rack, form: Option<Form>) -> Outcome {
    let (lots, looks, lines) = visit.read(|reader| {
        Ok((
            store::rack::lots(reader, rack.id)?,
            store::rack::looks(reader, rack.id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Rack, rack.id))?,
        ))
    })?;
    let ids: Vec<i64> = lots.iter().map(|one| one.lot).collect();
    let ranked = rank(&ids, &looks);
    let mut shell = Shell::of(visit, &format!("Rack {}", rack.code))
        .crumb("/formulations", "Formulations")
        .crumb("/rack", "Rack");
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let page = RackPage {
        shell,
        lead: lead(rack, &ranked, &lots),
        ranking: ranking(&ranked, &lots),
        lots: ranked.iter().filter_map(|one| strip(one, &lots, &looks)).collect(),
        form: form.filter(|_| lots.len() < PLACES),
        trail: Trail::of(&lines, visit.at.zone),
    };
    page_with(status, &page)
}

fn lead(rack: &Rack, ranked: &[Standing], lots: &[RackLot]) -> String {
    let best = ranked.first().filter(|one| one.looks > 0);
    let best = best.and_then(|one| lots.iter().find(|lot| lot.lot == one.lot));
    let count = show::counted(lots.len(), "development lot", "development lots");
    let stands = best.map(|lot| format!(" {} stands best.", lot.number)).unwrap_or_default();
    format!("{}: {count} from {}.{stands}", rack.title, date_shown(rack.started_on))
}

fn ranking(ranked: &[Standing], lots: &[RackLot]) -> Table {
    let rows = (1..).zip(ranked).filter_map(|(place, one)| {
        let lot = lots.iter().find(|lot| lot.lot == one.lot)?;
        let collapse = match (one.looks, one.collapsed_by_day) {
            (0, _) => "not looked at yet".to_string(),
            (_, Some(day)) => format!("by day {day}"),
            (1 | 2, None) => "needs three looks".to_string(),
            (_, None) => "has not".to_string(),
        };
        Some(vec![
            Cell::link(format!("/lots/{}", lot.lot), format!("{place}. {}", lot.number)),
            Cell::link(format!("/formulation-versions/{}", lot.formulation_version), lot.formulation.clone()),
            Cell::text(collapse),
            Cell::number_or_missing(one.last_ratio.map(|ratio| ratio.round_dp(2).to_string()), "not read"),
            Cell::number_or_missing(one.last_inversions.map(|count| count.to_string()), "not counted"),
            Cell::number(one.looks.to_string()),
        ])
    });
    let heads = ["Lot", "Formulation", "Collapsed", "Newest F#", "Newest inversions#", "Looks#"];
    let caption = "Development lots: not collapsed first, then the highest F, then the fewest inversions";
    Table::new(caption, &heads, "No lot stands on it yet.").rows(rows)
}

fn strip(one: &Standing, lots: &[RackLot], looks: &[Look]) -> Option<(String, String, Option<Strip>)> {
    let lot = lots.iter().find(|lot| lot.lot == one.lot)?;
    let mut own: Vec<&Look> = looks.iter().filter(|look| look.lot == one.lot).collect();
    own.sort_by_key(|look| (look.day, look.sample));
    let cylinder = |look: &&Look| Cylinder {
        age: format!("day {}", look.day),
        ratio: look.ratio,
        clarity: look.clarity,
        inversions: match look.inversions_shown.as_str() {
            "" => String::new(),
            shown if shown.contains("inversion") => shown.to_string(),
            shown => format!("{shown} inversions"),
        },
        is_small: true,
    };
    let cylinders: Vec<Cylinder> = own.iter().map(cylinder).collect();
    let strip = (!cylinders.is_empty()).then(|| Strip::of(&cylinders));
    Some((lot.number.clone(), lot.formulation.clone(), strip))
}

fn put(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let rack = visit.read(|reader| store::rack::get(reader, id))?;
    form::submit(
        visit,
        put_form(visit, &rack)?,
        |typed| typed.record("lot"),
        |actor, lot| acts::rack::put(visit.db(), actor, id, lot),
        |()| format!("/rack/{id}"),
        |status, form| shown(status, visit, &rack, Some(form)),
    )
}
