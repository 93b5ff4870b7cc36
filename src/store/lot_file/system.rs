//! The system behind the records: what a lot file says of it.

use chrono_tz::Tz;

use crate::domain::moment::Moment;
use crate::store::{Answer, Reader, door, trail, verify};

/// Versions, the newest entry, the check of the whole chain, and who last confirmed the clock. Walks the whole trail.
pub fn facts(reader: &Reader<'_>, zone: Tz) -> Answer<Vec<(String, String)>> {
    facts_with(reader, zone, chain(reader))
}

/// The same for a page, which does not walk the trail.
pub fn facts_at_hand(reader: &Reader<'_>, zone: Tz) -> Answer<Vec<(String, String)>> {
    let words = "made with each export, and at any time by the command “supernate verify”";
    facts_with(reader, zone, words.to_string())
}

fn facts_with(reader: &Reader<'_>, zone: Tz, chain: String) -> Answer<Vec<(String, String)>> {
    let schema: i64 =
        reader.one("schema version", "select max(version) from refinery_schema_history", [], |row| {
            row.get(0)
        })?;
    let head = trail::head(reader)?;
    let newest = head.map_or("none".to_string(), |(act, seal)| format!("{act}, seal {seal}"));
    Ok([
        ("Program", format!("Supernate {}", env!("CARGO_PKG_VERSION"))),
        ("Database", format!("SQLite {}, schema version {schema}", door::library_version())),
        ("Newest entry", newest),
        ("Check of the chain", chain),
        ("Clock last confirmed", clock(reader, zone)?),
    ]
    .map(|(name, words)| (name.to_string(), words))
    .into())
}

fn chain(reader: &Reader<'_>) -> String {
    let report = verify::chain_alone(reader);
    match report.findings.first() {
        None => format!("holds: each of {} entries follows from the one before", report.acts),
        Some(finding) => format!("broken: {finding}"),
    }
}

fn clock(reader: &Reader<'_>, zone: Tz) -> Answer<String> {
    let found = reader.maybe(
        "select a.at, a.full_name, a.reason
         from trail_subject s
         join trail_act a on a.id = s.act
         where s.kind = 'site' and s.subject = 1 and a.act = 'ConfirmClock' and a.outcome = 'done'
         order by s.act desc
         limit 1",
        [],
        |row| Ok((row.get::<_, String>(0)?, row.get::<_, String>(1)?, row.get::<_, Option<String>>(2)?)),
    )?;
    Ok(found.map_or("not confirmed on this system".to_string(), |(at, by, how)| {
        let at = Moment::from_stored(&at, zone).map_or(at, |moment| moment.shown());
        format!("{at} by {by}: {}", how.unwrap_or_default())
    }))
}
