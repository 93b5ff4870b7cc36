//! Certificates of analysis: worked out from the reviewed release results, signed, one version after another.

use super::lot_decision::grounds;
use super::signature::{Certification, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::certificate::{CertificateContent, CertificateRow, CertifiedSample, may_certify};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::judgement::limit::limit_words;
use crate::domain::lot_decision::results_stand;
use crate::domain::moment::{Moment, date_from_stored, date_shown};
use crate::domain::reason::Reason;
use crate::domain::review::not_own_work;
use crate::domain::specification::{Limit, LimitSet, SpecificationContent};
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::Reader;
use crate::store::certificate::{Certified, ReviewedSample};
use crate::store::door::Db;

/// What a certificate of the lot would state now; `at` tells the zone its instants are written in.
pub fn draft(reader: &Reader<'_>, lot: i64, at: Moment) -> Result<CertificateContent, Failure> {
    let found = store::lot::get(reader, lot)?;
    let decided = store::lot_decision::of_lot(reader, lot)?;
    let decision = decided.last();
    let results = store::certificate::results(reader, lot)?;
    let life = match decision.and_then(|one| one.shelf_life_assignment) {
        Some(id) => Some(store::shelf_life::get(reader, id)?.assigned),
        None => None,
    };
    let mut specifications: Vec<String> =
        results.iter().filter_map(|one| one.specification.clone()).collect();
    specifications.dedup();
    let on = |stored: &str| date_from_stored(stored).map(date_shown).unwrap_or_default();
    let sample = |one: ReviewedSample| CertifiedSample {
        received_on: one.received_on.as_deref().map(on).unwrap_or_default(),
        reviewed_at: Moment::from_stored(&one.reviewed_at, at.zone).map(|at| at.shown()).unwrap_or_default(),
        number: one.number,
        reviewed_by: one.reviewed_by,
    };
    Ok(CertificateContent {
        product: format!("{} {}", found.product_code, found.product_name),
        presentation: found.presentation_words.clone(),
        formulation: format!("{} version {}", found.formulation_code, found.formulation_number),
        made_on: found.made_on.map(date_shown).unwrap_or_default(),
        expiry: found.expires_on.map_or("not decided yet".to_string(), date_shown),
        storage: life.map(|life| life.storage_statement).unwrap_or_default(),
        specifications,
        rows: results.iter().map(row).collect::<Result<_, _>>()?,
        samples: store::certificate::samples(reader, lot)?.into_iter().map(sample).collect(),
        decision: decision.map_or("not decided yet".to_string(), |one| {
            format!("{} on {}", one.decision, date_shown(one.decided_on))
        }),
        lot: found.number,
    })
}

fn row(found: &Certified) -> Result<CertificateRow, Failure> {
    let method = serde_json::from_str(&found.method_content)?;
    let content: Option<SpecificationContent> =
        found.specification_content.as_deref().map(serde_json::from_str).transpose()?;
    let limits = content.as_ref().and_then(|content| content.of(&found.test));
    let limit = limits.map(|limits| match limits.limit(LimitSet::Release) {
        limit @ Limit::Between { .. } => {
            format!("{} {}", limit_words(limit, None), limits.unit).trim_end().to_string()
        }
        limit => limit_words(limit, Some(&method)),
    });
    let test = match found.component.is_empty() {
        true => found.title.clone(),
        false => format!("{}, {}", found.title, found.component),
    };
    Ok(CertificateRow {
        test,
        method: found.method.clone(),
        limit: limit.unwrap_or_else(|| "no limit".to_string()),
        result: format!("{} {}", found.shown, found.unit).trim_end().to_string(),
        verdict: found.verdict.clone(),
        sample: found.sample.clone(),
    })
}

/// QA signs a version. `seen` is the digest of what the page showed.
///
/// Refuses own work in the release samples, results that do not stand ([`results_stand`]), then in the order of
/// [`may_certify`].
pub fn sign(
    db: &Db,
    actor: &Actor,
    lot: i64,
    seen: &str,
    why: &str,
    signed: &Signed<Certification>,
) -> Result<i64, Failure> {
    db.change(actor, Act::SignCertificate, &Reason::none(), |change| {
        let grounds = grounds(change, lot, actor.at.date())?;
        change.concerns(Kind::Lot, lot)?;
        grounds.facts.release.iter().try_for_each(|sample| not_own_work(sample, actor.account))?;
        let content = serde_json::to_string(&draft(change, lot, actor.at)?)?;
        if !grounds.facts.is_imported {
            results_stand(&grounds.facts)?;
        }
        let earlier = store::certificate::of_lot(change, lot)?;
        let newest = earlier.first().map(|one| (one.version, one.content == content));
        let is_as_shown = digest(&content) == seen;
        may_certify(&grounds.lot.number, grounds.facts.is_imported, is_as_shown, newest, why)?;
        let version = newest.map_or(1, |(version, _)| version + 1);
        let canonical = store::certificate::canonical(version, why, &content);
        let signature = signed.put_under(change, Subject::new(Kind::Lot, lot), &canonical)?;
        let why = Some(why).filter(|why| !why.is_empty());
        let id = store::certificate::insert(change, lot, version, why, &content, signature)?;
        change.tell(format!("certificate of analysis of {}, version {version}", grounds.lot.number));
        Ok(id)
    })
}

/// The digest of a certificate's content, as a page sends it back.
pub fn digest(content: &str) -> String {
    sha256_hex(content.as_bytes())
}
