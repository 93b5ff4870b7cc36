//! A calendar file (RFC 5545): whole-day events that other calendar programs read.

use chrono::{DateTime, NaiveDate, Utc};

/// One whole-day event.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Event {
    /// Stays the same over every export, so that an import again updates the event.
    pub uid: String,
    pub summary: String,
    pub place: String,
    pub first_on: NaiveDate,
    pub last_on: NaiveDate,
}

/// The file: CRLF line ends, lines folded at 75 octets, text escaped. The end of a whole-day event is the day
/// after its last one, so it always lies after the start (RFC 5545 3.6.1).
pub fn calendar(name: &str, stamp: DateTime<Utc>, events: &[Event]) -> String {
    let stamp = stamp.format("%Y%m%dT%H%M%SZ").to_string();
    let mut lines = vec![
        "BEGIN:VCALENDAR".to_string(),
        "VERSION:2.0".to_string(),
        "PRODID:-//Supernate//Pull list//EN".to_string(),
        "CALSCALE:GREGORIAN".to_string(),
        format!("X-WR-CALNAME:{}", escaped(name)),
    ];
    for event in events {
        let last_on = event.last_on.max(event.first_on);
        let end = last_on.succ_opt().unwrap_or(last_on);
        lines.extend([
            "BEGIN:VEVENT".to_string(),
            format!("UID:{}", escaped(&event.uid)),
            format!("DTSTAMP:{stamp}"),
            format!("DTSTART;VALUE=DATE:{}", event.first_on.format("%Y%m%d")),
            format!("DTEND;VALUE=DATE:{}", end.format("%Y%m%d")),
            format!("SUMMARY:{}", escaped(&event.summary)),
            format!("LOCATION:{}", escaped(&event.place)),
            "TRANSP:TRANSPARENT".to_string(),
            "END:VEVENT".to_string(),
        ]);
    }
    lines.push("END:VCALENDAR".to_string());
    lines.iter().map(|line| folded(line)).collect()
}

/// Backslash, semicolon, comma and line ends are escaped; other control characters are left out.
fn escaped(text: &str) -> String {
    let mut escaped = String::new();
    for c in text.chars() {
        match c {
            '\\' | ';' | ',' => {
                escaped.push('\\');
                escaped.push(c);
            }
            '\n' => escaped.push_str("\\n"),
            c if c.is_control() => {}
            c => escaped.push(c),
        }
    }
    escaped
}

/// A line of at most 75 octets, continued on lines that begin with a space, never inside a character.
fn folded(line: &str) -> String {
    let mut folded = String::new();
    let mut octets = 0;
    for c in line.chars() {
        if octets + c.len_utf8() > 75 {
            folded.push_str("\r\n ");
            octets = 1;
        }
        folded.push(c);
        octets += c.len_utf8();
    }
    folded.push_str("\r\n");
    folded
}

#[cfg(test)]
mod tests {
    use super::*;

    fn event(first_on: &str, last_on: &str) -> Event {
        Event {
            uid: "1@site".to_string(),
            summary: "Pull ST-031-P07, 25\u{a0}°C/60\u{a0}%\u{a0}RH; upright, 18 months of lot TW-104-0640"
                .to_string(),
            place: "CH-1".to_string(),
            first_on: first_on.parse().unwrap(),
            last_on: last_on.parse().unwrap(),
        }
    }

    #[test]
    fn an_event_ends_after_it_starts_also_on_one_day() {
        let stamp = "2026-12-01T09:00:00Z".parse().unwrap();
        for (first, last, end) in [
            ("2026-12-03", "2026-12-03", "20261204"),
            ("2026-12-31", "2026-12-31", "20270101"),
            ("2028-02-22", "2028-02-29", "20280301"),
            ("2026-12-03", "2026-12-01", "20261204"),
        ] {
            let file = calendar("Pulls", stamp, &[event(first, last)]);
            assert!(file.contains(&format!("DTEND;VALUE=DATE:{end}\r\n")), "{file}");
            assert!(file.contains("DTSTAMP:20261201T090000Z\r\n"), "{file}");
        }
    }

    #[test]
    fn lines_are_escaped_and_folded_at_75_octets() {
        let stamp = "2026-12-01T09:00:00Z".parse().unwrap();
        let file = calendar("Pulls; all", stamp, &[event("2026-12-03", "2026-12-10")]);
        assert!(file.contains("X-WR-CALNAME:Pulls\\; all\r\n"));
        assert!(file.split("\r\n").all(|line| line.len() <= 75), "{file}");
        assert!(file.replace("\r\n ", "").contains("RH\\; upright\\, 18 months of lot TW-104-0640\r\n"));
        assert!(file.ends_with("END:VCALENDAR\r\n"));
    }
}
