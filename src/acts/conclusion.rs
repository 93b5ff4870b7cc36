//! Concluding an evaluation: what the data and the answers allow, then one signature over all of it.

use super::signature::{self, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::conclusion::cap::{Cap, NoLeaf, most_months};
use crate::domain::conclusion::rule::{Facts, may_conclude};
use crate::domain::conclusion::suggestion::{self, Suggestion};
use crate::domain::conclusion::{Content, LeftOutLot, Lot, Proposal, test_of};
use crate::domain::evaluation::Replicates;
use crate::domain::evaluation::group::{self, Computed, Wishes};
use crate::domain::evaluation::record::{Group, Record, conforming_until, covered_months};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::setting::POOLING_PERCENT;
use crate::domain::specification::SpecificationContent;
use crate::domain::subject::{Kind, Subject};
use crate::report::evaluation::words;
use crate::store;
use crate::store::Reader;
use crate::store::door::Db;

/// The rules by which a conclusion is drawn.
const RULES: &str = "ICH Q1E (2003)";

/// A conclusion worked out, whether or not it may be signed.
pub struct Prepared {
    pub group: Group,
    pub computed: Vec<Computed>,
    pub content: Content,
    pub facts: Facts,
    pub cap: Result<Cap, NoLeaf>,
    /// Every lot of the condition but development ones: number, name, formulation.
    pub lots: Vec<Lot>,
    pub accelerated: Suggestion,
    pub intermediate: Suggestion,
}

/// The earliest age that binds, with its test and lot.
struct Root {
    months: f64,
    words: String,
}

/// Works out a conclusion from the records as they stand; nothing is written.
pub fn prepare(reader: &Reader<'_>, arm: i64, proposal: &Proposal) -> Result<Prepared, Failure> {
    let group = store::evaluation::group_of_arm(reader, arm)?;
    let all = store::evaluation::records_of_presentation(reader, group.key.presentation)?;
    let groups = store::evaluation::groups(reader, group.key.presentation)?;
    let arms = store::evaluation::arms(reader, group.key.presentation)?;
    let bindings = store::evaluation::specifications(reader, group.key.presentation)?;
    let specification = bindings.first().map_or("no specification".to_string(), |one| one.words.clone());
    let limits: SpecificationContent =
        bindings.first().and_then(|one| serde_json::from_str(&one.content).ok()).unwrap_or_default();
    let stored = store::setting::get(reader, POOLING_PERCENT.name)?;
    let alpha_percent = POOLING_PERCENT.value(stored.as_deref());
    let of_use = |wanted: &dyn Fn(&Group) -> bool| -> Vec<Record> {
        let wanted: Vec<i64> = groups.iter().filter(|one| wanted(one)).map(|one| one.arm).collect();
        let is_of = |record: &&Record| arms.iter().any(|(arm, of)| *arm == record.arm && wanted.contains(of));
        all.iter().filter(is_of).cloned().collect()
    };
    let own = of_use(&|one| one.arm == group.arm);
    let wishes = Wishes {
        replicates: Replicates::Mean,
        scale: None,
        formulation_version: None,
        without: proposal.left_out.clone(),
        alpha: alpha_percent as f64 / 100.0,
    };
    let computed = group::compute_all(&group, &own, &limits, &wishes);
    let chosen = |one: &Record| !proposal.left_out.iter().any(|(lot, _)| *lot == one.lot);
    let look = |records: Vec<Record>| {
        let records: Vec<Record> = records.into_iter().filter(chosen).collect();
        suggestion::suggest(&records, &all, &limits)
    };
    let accelerated = look(of_use(&|one| one.condition_use == "accelerated"));
    let intermediate = look(of_use(&|one| !one.is_labelled && one.condition_use.contains("intermediate")));
    let found = Worked { group: &group, own: &own, computed: &computed, proposal };
    let cap = proposal.answers.cap(found.covered());
    let mut content = found.content(&cap);
    (content.specification, content.alpha_percent) = (specification, alpha_percent);
    let on_study = store::evaluation::lots_on_study(reader, group.key.presentation)?;
    content.suggested = accelerated.sentences("accelerated");
    if on_study > store::evaluation::NEWEST_LOTS {
        let newest = store::evaluation::NEWEST_LOTS;
        content
            .suggested
            .push(format!("Only the newest {newest} of {on_study} lots on study were looked at."));
    }
    content.suggested.extend(intermediate.sentences("intermediate"));
    let facts = found.facts(&cap, &content, (&accelerated, &intermediate));
    let lots = found.lots();
    Ok(Prepared { computed, content, facts, cap, lots, accelerated, intermediate, group })
}

/// The pieces a conclusion is worked out from.
struct Worked<'a> {
    group: &'a Group,
    own: &'a [Record],
    computed: &'a [Computed],
    proposal: &'a Proposal,
}

impl Worked<'_> {
    fn lots(&self) -> Vec<Lot> {
        let mut lots: Vec<Lot> = Vec::new();
        for one in self.own.iter().filter(|one| !one.is_development) {
            if !lots.iter().any(|lot| lot.id == one.lot) {
                lots.push(Lot {
                    id: one.lot,
                    number: one.lot_number.clone(),
                    formulation: one.formulation.clone(),
                });
            }
        }
        lots
    }

    /// The development lots of a condition that has no other lot.
    fn development_alone(&self) -> Vec<String> {
        if self.own.iter().any(|one| !one.is_development) {
            return Vec::new();
        }
        let mut names: Vec<String> = self.own.iter().map(|one| one.lot_number.clone()).collect();
        names.dedup();
        names
    }

    fn is_left_out(&self, lot: i64) -> bool {
        self.proposal.left_out.iter().any(|(left, _)| *left == lot)
    }

    /// X: the least reach of data over the tests with a limit, on every chosen lot.
    fn covered(&self) -> f64 {
        let limited = self.computed.iter().filter(|one| has_limit(one));
        limited.filter_map(|one| covered_months(&one.built)).min_by(f64::total_cmp).unwrap_or(0.0)
    }

    fn root(&self) -> Option<Root> {
        self.computed.iter().filter_map(|one| self.root_of(one)).min_by(|a, b| a.months.total_cmp(&b.months))
    }

    fn root_of(&self, one: &Computed) -> Option<Root> {
        if one.is_in_words {
            let own: Vec<&Record> = self
                .own
                .iter()
                .filter(|record| record.point.test == one.test && !self.is_left_out(record.lot))
                .collect();
            let (until, bad) = conforming_until(&own);
            let (_, lot) = bad?;
            let months = until.and_then(|age| age.round().try_into().ok()).unwrap_or(0.0);
            let words = format!("{} binds: lot {lot} conforms to {months} months only.", one.title);
            return Some(Root { months, words });
        }
        let found = one.found.as_ref().ok()?;
        let months = found.life.outcome.months()?;
        let lot = found.life.binding_lot.map(|lot| format!(", lot {}", found.series.lots[lot].name));
        let words = format!("{} binds{}: exactly {months:.4} months.", one.title, lot.unwrap_or_default());
        Some(Root { months, words })
    }

    fn content(&self, cap: &Result<Cap, NoLeaf>) -> Content {
        let (chosen, out): (Vec<Lot>, Vec<Lot>) =
            self.lots().into_iter().partition(|lot| !self.is_left_out(lot.id));
        let why =
            |id: i64| self.proposal.left_out.iter().find(|(lot, _)| *lot == id).map(|(_, why)| why.clone());
        let root = self.root();
        let months = cap.as_ref().map(|cap| cap.months).ok();
        let most = months.and_then(|cap| most_months(root.as_ref().map(|root| root.months), cap));
        Content {
            program: format!("supernate {}", env!("CARGO_PKG_VERSION")),
            rules: RULES.to_string(),
            presentation: format!("{} {}", self.group.product_code, self.group.presentation_code),
            condition: self.group.condition_words(),
            specification: String::new(),
            alpha_percent: 0,
            lots: chosen,
            left_out: out
                .into_iter()
                .map(|lot| LeftOutLot {
                    id: lot.id,
                    number: lot.number,
                    why: why(lot.id).unwrap_or_default(),
                })
                .collect(),
            answers: self.proposal.answers.clone(),
            suggested: Vec::new(),
            tests: self.computed.iter().map(test_of).collect(),
            covered_months: words::months(self.covered()),
            node: cap.as_ref().map(|cap| cap.node.clone()).unwrap_or_default(),
            cap_months: months.map(words::months).unwrap_or_default(),
            steps: cap.as_ref().map(|cap| cap.steps.clone()).unwrap_or_default(),
            most_months: most.unwrap_or_default(),
            binds: binds(root.as_ref(), months),
            proposed_months: self.proposal.months,
        }
    }

    fn facts(&self, cap: &Result<Cap, NoLeaf>, content: &Content, seen: (&Suggestion, &Suggestion)) -> Facts {
        let answers = &self.proposal.answers;
        let counted =
            |one: &&Record| one.result.is_some() && !one.is_development && !self.is_left_out(one.lot);
        let is_frozen = answers.storage == "freezer";
        Facts {
            is_imported: self.group.is_imported,
            is_long_term: self.group.is_labelled || self.group.condition_use.starts_with("long-term"),
            chosen: content.lots.len(),
            development: self.development_alone(),
            without_reason: content
                .left_out
                .iter()
                .filter(|lot| lot.why.trim().chars().count() < 10)
                .map(|lot| (lot.id, lot.number.clone()))
                .collect(),
            not_evaluable: self.computed.iter().filter_map(not_evaluable).collect(),
            unsigned: self.own.iter().filter(counted).filter(|one| !one.point.is_signed).count(),
            suggested_accelerated: seen.0.accelerated().filter(|_| !is_frozen),
            accelerated: answers.accelerated.clone(),
            accelerated_why: answers.accelerated_why.clone(),
            suggested_intermediate: seen.1.intermediate().filter(|_| answers.accelerated != "none"),
            intermediate: answers.intermediate.clone(),
            intermediate_why: answers.intermediate_why.clone(),
            is_little_change: answers.is_little_change,
            little_change_why: answers.little_change_why.clone(),
            has_supporting_data: answers.has_supporting_data,
            supporting_why: answers.supporting_why.clone(),
            no_leaf: cap.as_ref().err().copied(),
            most_months: content.most_months,
            binds: content.binds.clone(),
            covered_months: self.covered(),
            proposed_months: self.proposal.months,
            physical_why: answers.physical_why.clone(),
        }
    }
}

fn binds(root: Option<&Root>, cap: Option<f64>) -> String {
    match (root, cap) {
        (Some(root), Some(cap)) if root.months <= cap => root.words.clone(),
        (_, Some(cap)) => format!("The cap of the tree binds: {} months.", words::months(cap)),
        (Some(root), None) => root.words.clone(),
        (None, None) => String::new(),
    }
}

fn has_limit(one: &Computed) -> bool {
    let series = &one.built.series;
    series.lower_limit.is_some() || series.upper_limit.is_some()
}

/// A test with a limit through which no shelf life can be computed, and what it needs.
fn not_evaluable(one: &Computed) -> Option<(String, String)> {
    if !has_limit(one) {
        return None;
    }
    match &one.found {
        Err(sentence) => Some((one.title.clone(), sentence.clone())),
        Ok(found) => words::is_not_estimable(found).then(|| (one.title.clone(), words::needs(found))),
    }
}

/// Concludes: the document is worked out anew inside the act and signed as it stands there. Refuses in the order of
/// [`may_conclude`].
pub fn conclude(
    db: &Db,
    actor: &Actor,
    arm: i64,
    proposal: &Proposal,
    signed: &Signed<signature::Conclusion>,
) -> Result<i64, Failure> {
    db.change(actor, Act::ConcludeEvaluation, &Reason::none(), |change| {
        let found = prepare(change, arm, proposal)?;
        may_conclude(&found.facts)?;
        let presentation = found.group.key.presentation;
        let id = store::conclusion::insert(change, presentation, found.group.arm, &found.content)?;
        signed.put_under(change, Subject::new(Kind::Conclusion, id), &found.content.canonical())?;
        change.concerns(Kind::Presentation, presentation)?;
        for lot in &found.content.lots {
            change.concerns(Kind::Lot, lot.id)?;
        }
        change.tell(format!(
            "{} at {}: {} months proposed, at most {} by the data and the answers ({})",
            found.content.presentation,
            found.content.condition,
            found.content.proposed_months,
            found.content.most_months,
            found.content.binds
        ));
        Ok(id)
    })
}

/// The same conclusion worked out from the records as they stand now, by the choices it was signed with.
pub fn again(reader: &Reader<'_>, arm: i64, content: &Content) -> Result<Content, Failure> {
    let proposal = Proposal {
        answers: content.answers.clone(),
        left_out: content.left_out.iter().map(|lot| (lot.id, lot.why.clone())).collect(),
        months: content.proposed_months,
    };
    Ok(prepare(reader, arm, &proposal)?.content)
}
