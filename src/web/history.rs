//! The whole history, newest first, and one act with the records it changed.

use askama::Template;

use super::page::Shell;
use super::part::{TrailLine, trail_line};
use super::reply::{Outcome, page};
use super::route::{Route, get};
use super::show;
use super::visit::Visit;
use crate::store;
use crate::store::trail::ChangeLine;

pub const ROUTES: &[Route] = &[get("/history", history), get("/history/{act}", act)];

const PAGE: i64 = 50;

#[derive(Template)]
#[template(path = "history/list.html")]
struct HistoryPage {
    shell: Shell,
    lines: Vec<TrailLine>,
    older: Option<i64>,
    head: String,
}

fn history(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let (found, head) = visit
        .read(|reader| Ok((store::trail::before(reader, before, PAGE)?, store::trail::head(reader)?)))?;
    let older = found.last().map(|line| line.act).filter(|act| *act > 1 && found.len() == PAGE as usize);
    let lines = found.iter().map(|line| trail_line(line, visit.at.zone)).collect();
    let head = head.map(|(act, digest)| format!("{act} · {}", show::digest(&digest))).unwrap_or_default();
    page(&HistoryPage { shell: Shell::of(visit, "History"), lines, older, head })
}

#[derive(Template)]
#[template(path = "history/act.html")]
struct ActPage {
    shell: Shell,
    line: TrailLine,
    digest: String,
    changes: Vec<ChangeLine>,
}

fn act(visit: &Visit) -> Outcome {
    let number = visit.id("act")?;
    let (found, changes) = visit
        .read(|reader| Ok((store::trail::act(reader, number)?, store::trail::changes_of(reader, number)?)))?;
    let digest = show::digest(&found.digest);
    let line = trail_line(&found, visit.at.zone);
    let shell = Shell::of(visit, &format!("Entry {number}")).crumb("/history", "History");
    page(&ActPage { shell, line, digest, changes })
}
