//! Stories of the demo: what the invented site shows, made by the same acts as everything else.

use supernate::cli::demo;
use supernate::store;
use supernate::store::open_pull::{Show, list};

use super::support::{Scratch, same, start};

/// The lists read a derived row of each open pull; it must say what the records say.
#[test]
fn every_open_pull_of_the_demo_stands_in_the_lists_as_its_records_say() {
    let folder = Scratch::new();
    let (opened, _, people) = demo::make(&folder.0.join("demo"), start()).unwrap();
    assert!(people.len() >= 8);
    let today = start().date_naive();
    let (found, expected) = opened
        .db
        .read(|reader| {
            let mut found = Vec::new();
            for show in [Show::ToTake, Show::InTest] {
                found.extend(list(reader, show, today, None, 10_000)?);
            }
            let expected: Result<Vec<_>, _> =
                found.iter().map(|pull| store::pull::get(reader, pull.pull)).collect();
            Ok((found, expected?))
        })
        .unwrap();
    assert!(found.iter().any(|pull| pull.facts.progress.complete > 0));
    assert!(found.iter().any(|pull| pull.facts.progress.started > 0));
    for (record, listed) in expected.iter().zip(&found) {
        same(record, listed);
    }
}
