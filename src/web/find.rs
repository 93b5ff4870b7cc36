//! The search box: an exact number opens its record, everything else is a page of results.

use super::page::Shell;
use super::record::Record;
use super::reply::{Outcome, see};
use super::route::{Route, get};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::domain::find::folded;
use crate::store;
use crate::store::find::{Found, Hit};

pub const ROUTES: &[Route] = &[get("/find", find)];

/// So many results of a kind are shown.
const MOST: usize = 20;

/// How a kind is headed, what its number is called, and where its pages are.
fn words(found: Found) -> (&'static str, &'static str, &'static str) {
    match found {
        Found::Lot => ("Lots", "number", "/lots"),
        Found::Study => ("Studies", "number", "/studies"),
        Found::Sample => ("Samples", "number", "/samples"),
        Found::Container => ("Containers", "label", "/studies"),
        Found::Product => ("Products", "code", "/products"),
        Found::Presentation => ("Presentations", "code", "/presentations"),
        Found::Formulation => ("Formulations", "code", "/formulations"),
        Found::Material => ("Materials", "code", "/materials"),
        Found::Method => ("Methods", "code", "/methods"),
        Found::Specification => ("Specifications", "code", "/specifications"),
        Found::Protocol => ("Protocols", "code", "/protocols"),
        Found::Instrument => ("Instruments", "code", "/instruments"),
        Found::MaterialLot => ("Material lots", "number", "/material-lots"),
        Found::Equipment => ("Equipment", "code", "/equipment"),
        Found::Chamber => ("Chambers", "code", "/chambers"),
        Found::Condition => ("Conditions", "code", "/conditions"),
        Found::Customer => ("Customers", "code", "/customers"),
    }
}

fn path(found: Found, hit: &Hit) -> String {
    let (_, _, base) = words(found);
    match found {
        Found::Customer => base.to_string(),
        _ => format!("{base}/{}", hit.owner.unwrap_or(hit.id)),
    }
}

fn why(found: Found, hit: &Hit, typed: &str) -> String {
    let (_, number, _) = words(found);
    let (folded_number, wanted) = (folded(&hit.number), folded(typed));
    if folded_number == wanted {
        format!("the {number}, whatever its separators")
    } else if folded_number.contains(&wanted) {
        format!("in the {number}")
    } else {
        "in its words".to_string()
    }
}

fn table(found: Found, hits: &[Hit], typed: &str) -> Table {
    let (_, number, _) = words(found);
    let head = format!("{}{}", number[..1].to_uppercase(), &number[1..]);
    let caption = if hits.len() > MOST {
        format!("The first {MOST}; type more of the number to narrow it")
    } else {
        show::counted(hits.len(), "result", "results")
    };
    Table::new(&caption, &[&head, "What it is", "Found"], "").rows(hits.iter().take(MOST).map(|hit| {
        vec![
            Cell::link(path(found, hit), &hit.number),
            Cell::text(&hit.about),
            Cell::text(why(found, hit, typed)),
        ]
    }))
}

const SEARCHED: &str = "Searched: the numbers of lots, material lots, studies and samples, the labels of \
    containers, and the codes and names of products, presentations, formulations, materials, methods, \
    specifications, protocols, instruments, equipment, chambers, conditions and customers. Capitals and \
    separators do not matter.";

fn find(visit: &Visit) -> Outcome {
    visit.knows_query(&["q"])?;
    let typed: String = visit.query.get("q").unwrap_or_default().trim().chars().take(200).collect();
    let exact = visit.read(|reader| store::find::exact(reader, &typed))?;
    if let [(found, hit)] = &exact[..] {
        return see(path(*found, hit));
    }
    let groups = visit.read(|reader| store::find::holding(reader, &typed, MOST))?;
    let mut shell = Shell::of(visit, "Search");
    shell.searched = typed.clone();
    let count: usize = groups.iter().map(|(_, hits)| hits.len().min(MOST)).sum();
    let lead = match (folded(&typed).is_empty(), count) {
        (true, _) => "Type at least one letter or digit of a number, a code or a name.".to_string(),
        (_, 0) => format!("Nothing found for “{typed}”. Fewer characters find more."),
        _ => format!("{} for “{typed}”.", show::counted(count, "result", "results")),
    };
    let mut page = Record::new(shell, lead);
    for (found, hits) in &groups {
        page = page.table(words(*found).0, table(*found, hits, &typed));
    }
    page.sentences("", vec![SEARCHED.to_string()]).show()
}
