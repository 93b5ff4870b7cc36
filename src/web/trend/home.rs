//! False alarms expected and found, and what stands out lately.

use crate::domain::act::Act;
use crate::domain::moment::{date_shown, plus_days};
use crate::domain::trend::promise::{Kept, kept};
use crate::store;
use crate::store::trend::tally::Standout;
use crate::web::page::Shell;
use crate::web::record::Record;
use crate::web::reply::Outcome;
use crate::web::show;
use crate::web::table::{Cell, Table};
use crate::web::visit::Visit;

const LEAD: &str = "Each new result is compared with a forecast made before it was measured. If nothing is wrong, one \
                    forecast in a hundred is missed by chance.";

/// The page looks back a year.
const DAYS: i64 = 365;
const MOST: usize = 50;

pub(super) fn home(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let since = plus_days(visit.at.date(), -DAYS);
    let (counts, standing_out) = visit.read(|reader| {
        Ok((
            store::trend::tally::since(reader, since)?,
            store::trend::tally::standing_out(reader, since, MOST)?,
        ))
    })?;
    let Kept { actions, alerts, is_out } = kept(&counts.facts);
    let mut sentences = vec![actions, alerts];
    if is_out {
        sentences.push(
            "More than is ordinary: something real is wrong, or results scatter more wildly than the normal law."
                .to_string(),
        );
    }
    if counts.not_evaluable > 0 {
        let words = show::counted(counts.not_evaluable as usize, "result was", "results were");
        sentences.push(format!("{words} not evaluable and count in neither number."));
    }
    Record::new(Shell::of(visit, "Trend").crumb("/review", "Review"), LEAD)
        .fact("Since", date_shown(since))
        .quiet_link_if(true, "/trend/alike", "Versions that are one history")
        .quiet_link_if(visit.may(Act::DecideReview), "/review", "Review")
        .sentences("Expected and found", sentences)
        .table("What stands out", table(&standing_out))
        .show()
}

fn table(found: &[Standout]) -> Table {
    let heads = ["Lot", "Test", "Result#", "Verdict", "What it says", "Judged on"];
    let empty =
        "No alert, no action and no early warning in this year. Verdicts are given when a test is completed.";
    Table::new("The newest first", &heads, empty).rows(found.iter().map(row))
}

fn row(one: &Standout) -> Vec<Cell> {
    let part = if one.component.is_empty() { String::new() } else { format!(", {}", one.component) };
    vec![
        Cell::Link {
            path: format!("/lots/{}", one.lot),
            words: one.lot_number.clone(),
            note: one.place.clone(),
        },
        Cell::link(format!("/trend/tests/{}", one.sample_test), format!("{}{part}", one.title)),
        Cell::number(show::with_unit(&one.shown, &one.unit)),
        Cell::text(format!("{} ({})", super::words(&one.verdict), one.rule)),
        Cell::text(&one.sentence),
        Cell::text(date_shown(one.judged_on)),
    ]
}
