//! The chain of seals: no gap in the entries, and each seal follows from the one before and its own entry.

use rusqlite::{Row, Rows};

use super::Check;
use crate::domain::digest::{Encoder, hex};
use crate::store::trail::{ACT_ENTRY, LINE_ENTRY, chain_start, encode_row, link};
use crate::store::{Answer, Reader};

/// Reads the act of a row and what of the row is kept.
type Read = fn(&Row<'_>) -> rusqlite::Result<(i64, Vec<u8>)>;

/// The encoded rows of one query in the order of their act, one ahead.
struct Ahead<'a> {
    rows: Rows<'a>,
    next: Option<(i64, Vec<u8>)>,
    read: Read,
}

impl<'a> Ahead<'a> {
    fn over(rows: Rows<'a>, read: Read) -> Answer<Ahead<'a>> {
        let mut ahead = Ahead { rows, next: None, read };
        ahead.step()?;
        Ok(ahead)
    }

    fn step(&mut self) -> Answer<()> {
        self.next = match self.rows.next()? {
            Some(row) => Some((self.read)(row)?),
            None => None,
        };
        Ok(())
    }

    /// Takes the next row if it belongs to this act.
    fn take(&mut self, act: i64) -> Answer<Option<Vec<u8>>> {
        if self.next.as_ref().is_none_or(|(of, _)| *of != act) {
            return Ok(None);
        }
        let taken = self.next.take().map(|(_, bytes)| bytes);
        self.step()?;
        Ok(taken)
    }

    /// Skips rows of acts before this one, and names each act once.
    fn strays_before(&mut self, act: i64) -> Answer<Vec<i64>> {
        let mut strays = Vec::new();
        while let Some((of, _)) = self.next.as_ref().filter(|(of, _)| *of < act) {
            if strays.last() != Some(of) {
                strays.push(*of);
            }
            self.step()?;
        }
        Ok(strays)
    }
}

fn act_bytes(row: &Row<'_>) -> rusqlite::Result<(i64, Vec<u8>)> {
    let mut encoder = Encoder::new();
    encode_row(&mut encoder, row, 0, 14)?;
    Ok((row.get(0)?, encoder.bytes().to_vec()))
}

/// The act comes first and is not part of the line's bytes.
fn line_bytes(row: &Row<'_>) -> rusqlite::Result<(i64, Vec<u8>)> {
    let mut encoder = Encoder::new();
    encode_row(&mut encoder, row, 1, 7)?;
    Ok((row.get(0)?, encoder.bytes().to_vec()))
}

fn seal_bytes(row: &Row<'_>) -> rusqlite::Result<(i64, Vec<u8>)> {
    Ok((row.get(0)?, row.get(1)?))
}

pub(super) fn verify(reader: &Reader<'_>, expected: Option<&str>, check: &mut Check<'_>) -> Answer<()> {
    let connection = reader.connection();
    let mut acts = connection.prepare(&format!("select {ACT_ENTRY} from trail_act order by id"))?;
    let mut lines =
        connection.prepare(&format!("select act, {LINE_ENTRY} from trail_change order by act, line"))?;
    let mut seals = connection.prepare("select act, digest from trail_seal order by act")?;
    let mut acts = Ahead::over(acts.query([])?, act_bytes)?;
    let mut lines = Ahead::over(lines.query([])?, line_bytes)?;
    let mut seals = Ahead::over(seals.query([])?, seal_bytes)?;
    let (mut before, mut wanted) = (chain_start().to_vec(), 1);
    while let Some((act, entry)) = acts.next.take() {
        acts.step()?;
        if act > wanted {
            let sentence = format!("entries {wanted} to {} are missing from the trail", act - 1);
            check.found(Some(wanted), None, sentence);
        }
        strays(&mut lines, &mut seals, act, check)?;
        let entry = with_lines(entry, act, &mut lines, check)?;
        before = sealed(&before, act, &entry, seals.take(act)?, check);
        check.report.head = Some((act, hex(&before)));
        if expected.is_some_and(|expected| expected == hex(&before)) {
            check.report.expected_at = Some(act);
        }
        wanted = act + 1;
        check.report.acts += 1;
        check.tell("entries", check.report.acts);
    }
    strays(&mut lines, &mut seals, i64::MAX, check)?;
    if let Some(expected) = expected.filter(|_| check.report.expected_at.is_none()) {
        check.found(
            None,
            None,
            format!("no entry has the expected seal {expected}: the trail was cut or rewritten"),
        );
    }
    Ok(())
}

fn strays(lines: &mut Ahead<'_>, seals: &mut Ahead<'_>, act: i64, check: &mut Check<'_>) -> Answer<()> {
    for stray in lines.strays_before(act)? {
        check.found(Some(stray), None, "there are changed records of this entry, but not the entry itself");
    }
    for stray in seals.strays_before(act)? {
        check.found(Some(stray), None, "there is a seal of this entry, but not the entry itself");
    }
    Ok(())
}

fn with_lines(mut entry: Vec<u8>, act: i64, lines: &mut Ahead<'_>, check: &mut Check<'_>) -> Answer<Vec<u8>> {
    let mut count = 0;
    while let Some(bytes) = lines.take(act)? {
        entry.extend_from_slice(&bytes);
        count += 1;
    }
    check.report.lines += count as u64;
    entry.extend_from_slice(Encoder::new().integer(count).bytes());
    Ok(entry)
}

/// Compares the stored seal with the computed one. The chain goes on from the stored one, so that one changed entry
/// is named alone.
fn sealed(before: &[u8], act: i64, entry: &[u8], stored: Option<Vec<u8>>, check: &mut Check<'_>) -> Vec<u8> {
    let computed = link(before, entry).to_vec();
    match stored {
        None => {
            check.found(Some(act), None, "the entry has no seal");
            computed
        }
        Some(stored) if stored != computed => {
            let sentence = "the seal does not follow: the entry, one of its lines or the seal was changed";
            check.found(Some(act), None, sentence);
            stored
        }
        Some(stored) => stored,
    }
}
