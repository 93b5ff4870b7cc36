//! Answers to exceptions, decisions on samples, and the signatures of one signing act.

use rusqlite::named_params;

use crate::store::door::Change;
use crate::store::{Answer, Reader};

/// An answer as it is shown: to what, what, by whom, when.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct AnswerLine {
    pub about: String,
    pub answer: String,
    pub by: String,
    pub at: String,
}

pub fn insert_answer(
    change: &Change<'_>,
    sample: i64,
    flag: Option<i64>,
    about: &str,
    answer: &str,
) -> Answer<i64> {
    change.insert(
        "insert into exception_answer (sample, flag, about, answer, account)
         values (:sample, :flag, :about, :answer, :account)",
        named_params! {
            ":sample": sample,
            ":flag": flag,
            ":about": about,
            ":answer": answer,
            ":account": change.actor().account,
        },
    )
}

/// All answers of a sample, oldest first.
pub fn answers(reader: &Reader<'_>, sample: i64) -> Answer<Vec<AnswerLine>> {
    reader.all(
        "select x.about, x.answer, a.full_name, a.at
         from exception_answer x join trail_act a on a.id = x.act
         where x.sample = :sample order by x.id",
        named_params! { ":sample": sample },
        |row| Ok(AnswerLine { about: row.get(0)?, answer: row.get(1)?, by: row.get(2)?, at: row.get(3)? }),
    )
}

/// Records what a reviewer decided: `agree`, `send back` or `not yet`.
pub fn insert(
    change: &Change<'_>,
    sample: i64,
    decision: &str,
    content_digest: &str,
    why: Option<&str>,
) -> Answer<i64> {
    change.insert(
        "insert into review_decision (sample, decision, content_digest, why, account)
         values (:sample, :decision, :digest, :why, :account)",
        named_params! {
            ":sample": sample,
            ":decision": decision,
            ":digest": content_digest,
            ":why": why,
            ":account": change.actor().account,
        },
    )
}

/// A sample a reviewer has agreed to and not signed yet.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Agreed {
    pub sample: i64,
    /// Digest of the content the reviewer agreed to.
    pub content_digest: String,
    pub at: String,
}

/// A reviewer's signing list: samples whose newest decision by them is "agree" and that nobody has signed since.
pub fn agreed_by(reader: &Reader<'_>, account: i64) -> Answer<Vec<Agreed>> {
    reader.all(
        "select d.sample, d.content_digest, a.at
         from open_sample o
         cross join review_decision d on d.sample = o.sample
         join trail_act a on a.id = d.act
         where d.account = :account and d.decision = 'agree'
         and not exists (
             select 1 from review_decision later
             where later.sample = d.sample and later.account = d.account and later.id > d.id)
         and not exists (
             select 1 from signature g
             where g.kind = 'sample' and g.subject = d.sample and g.meaning = 'review' and g.act > d.act)
         order by d.id",
        named_params! { ":account": account },
        |row| Ok(Agreed { sample: row.get(0)?, content_digest: row.get(1)?, at: row.get(2)? }),
    )
}

/// One line of a receipt.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReceiptLine {
    pub sample: i64,
    pub number: String,
    pub lot_number: String,
    pub signer: String,
    pub at: String,
    pub digest: String,
    pub statement: Option<String>,
}

/// The review signatures that one act put down.
pub fn receipt(reader: &Reader<'_>, act: i64) -> Answer<Vec<ReceiptLine>> {
    reader.all(
        "select s.id, s.number, l.number, g.signer_name, a.at, g.digest, g.statement
         from signature g
         join trail_act a on a.id = g.act
         join trail_subject x on x.act = g.act and x.kind = 'sample' and x.subject = g.subject
         join sample s on s.id = g.subject
         join lot l on l.id = s.lot
         where g.act = :act and g.kind = 'sample' and g.meaning = 'review'
         order by g.id",
        named_params! { ":act": act },
        |row| {
            Ok(ReceiptLine {
                sample: row.get(0)?,
                number: row.get(1)?,
                lot_number: row.get(2)?,
                signer: row.get(3)?,
                at: row.get(4)?,
                digest: row.get(5)?,
                statement: row.get(6)?,
            })
        },
    )
}
