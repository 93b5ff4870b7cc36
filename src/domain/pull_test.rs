use super::*;

fn day(text: &str) -> NaiveDate {
    text.parse().unwrap()
}

/// Due 1 Dec 2026, window 1 to 8 Dec.
fn facts() -> PullFacts {
    PullFacts {
        started_on: Some(day("2026-06-01")),
        due_on: Some(day("2026-12-01")),
        earliest_on: Some(day("2026-12-01")),
        latest_on: Some(day("2026-12-08")),
        containers_needed: 2,
        ..PullFacts::default()
    }
}

fn taken(progress: Progress) -> PullFacts {
    PullFacts { event: Some(Event::Pulled), happened_on: Some(day("2026-12-02")), progress, ..facts() }
}

/// screen_U27, decision A17: one function says where a pull stands.
#[test]
fn the_status_of_a_pull_follows_its_facts() {
    let at =
        |started, complete, checked| Progress { tests: 3, started, complete, checked, ..Progress::default() };
    let signed = |progress| PullFacts { is_signed: true, ..taken(progress) };
    let out = Progress { out_of_specification: 1, ..at(3, 3, 2) };
    let back = Progress { sent_back: 1, ..out };
    let table = [
        (facts(), "2026-11-30", PullState::Planned, Status::NotStarted),
        (facts(), "2026-12-01", PullState::Due, Status::NotStarted),
        (facts(), "2026-12-20", PullState::Due, Status::NotStarted),
        (taken(at(0, 0, 0)), "2026-12-02", PullState::Pulled, Status::InProgress),
        (taken(at(1, 0, 0)), "2026-12-02", PullState::InTesting, Status::InProgress),
        (taken(at(3, 2, 2)), "2026-12-02", PullState::InTesting, Status::InProgress),
        (taken(at(3, 3, 2)), "2026-12-02", PullState::Complete, Status::WaitingForCheck),
        (taken(at(3, 3, 3)), "2026-12-02", PullState::Checked, Status::WaitingForReview),
        (taken(out), "2026-12-02", PullState::OutOfSpecification, Status::OutOfSpecification),
        (taken(back), "2026-12-02", PullState::SentBack, Status::SentBack),
        (signed(back), "2026-12-02", PullState::Signed, Status::Signed),
        (
            PullFacts { event: Some(Event::Missed), ..facts() },
            "2026-12-20",
            PullState::Missed,
            Status::Missed,
        ),
        (
            PullFacts { event: Some(Event::Cancelled), ..facts() },
            "2026-12-20",
            PullState::Cancelled,
            Status::Missed,
        ),
    ];
    for (facts, today, expected_state, expected_status) in table {
        assert_eq!(state(&facts, day(today)), expected_state, "{facts:?}");
        assert_eq!(status(&facts, day(today)), expected_status, "{facts:?}");
    }
}

#[test]
fn side_facts_count_site_days() {
    let on = |date: &str| PullFacts { happened_on: Some(day(date)), ..taken(Progress::default()) };
    let table = [
        (facts(), "2026-12-08", ""),
        (facts(), "2026-12-09", "1 day late"),
        (facts(), "2026-12-10", "2 days late"),
        (on("2026-11-28"), "2026-12-30", "3 days early"),
        (on("2026-12-08"), "2026-12-30", ""),
        (on("2026-12-09"), "2026-12-30", "1 day late"),
    ];
    for (facts, today, words) in table {
        assert_eq!(side_fact(&facts, day(today)), words, "{facts:?}");
    }
}

fn scanned(found: &[Found]) -> Vec<Scanned> {
    found.iter().map(|found| Scanned { typed: "K7QD".to_string(), found: found.clone() }).collect()
}

fn take(found: &[Found], on: &str, why: &str) -> Take {
    Take { scanned: scanned(found), taken_on: day(on), why: why.to_string() }
}

/// screen_U68: a mismatch is a hard stop; req_C13: early, late and partial need a reason.
#[test]
fn a_pull_is_refused_for_its_first_fault() {
    let here = |container| Found::Here { container };
    let both = [here(1), here(2)];
    let why = "the chamber door failed";
    let typed = "K7QD".to_string();
    let last = PullFacts { is_last: true, ..facts() };
    use PullRefusal::*;
    let table = [
        (take(&both, "2026-12-01", ""), facts(), "2026-12-01", Ok(())),
        (take(&both, "2026-12-01", ""), taken(Progress::default()), "2026-12-01", Err(PullTaken)),
        (
            take(&[], "2026-12-01", ""),
            PullFacts { is_imported: true, event: Some(Event::Missed), ..facts() },
            "2026-12-01",
            Err(PullImported),
        ),
        (take(&[], "2026-12-02", ""), facts(), "2026-12-01", Err(TakenInFuture)),
        (take(&[], "2026-05-02", ""), facts(), "2026-12-01", Err(TakenBeforeTimeZero)),
        (take(&[], "2026-12-01", ""), facts(), "2026-12-01", Err(NoContainer)),
        (
            take(&[here(1), Found::Nowhere], "2026-12-01", why),
            facts(),
            "2026-12-01",
            Err(WrongLabel { place: 2, typed: typed.clone() }),
        ),
        (
            take(&[Found::Elsewhere("ST-032".to_string())], "2026-12-01", why),
            facts(),
            "2026-12-01",
            Err(LabelOfOther { place: 1, typed: typed.clone(), what: "ST-032".to_string() }),
        ),
        (
            take(&[Found::Left], "2026-12-01", why),
            facts(),
            "2026-12-01",
            Err(ContainerHasLeft { place: 1, typed: typed.clone() }),
        ),
        (
            take(&[here(1), here(1)], "2026-12-01", why),
            facts(),
            "2026-12-01",
            Err(ContainerScannedTwice { place: 2, typed }),
        ),
        (
            take(&both, "2026-11-30", ""),
            facts(),
            "2026-11-30",
            Err(EarlyWithoutReason("1 Dec 2026".to_string())),
        ),
        (take(&both, "2026-11-30", why), facts(), "2026-11-30", Ok(())),
        (take(&both, "2026-11-30", why), last, "2026-11-30", Err(LastPointEarly("1 Dec 2026".to_string()))),
        (
            take(&both, "2026-12-09", ""),
            facts(),
            "2026-12-09",
            Err(LateWithoutReason("8 Dec 2026".to_string())),
        ),
        (take(&both, "2026-12-09", why), facts(), "2026-12-09", Ok(())),
        (
            take(&[here(1)], "2026-12-01", ""),
            facts(),
            "2026-12-01",
            Err(PartialWithoutReason { taken: 1, needed: 2 }),
        ),
        (take(&[here(1)], "2026-12-01", why), facts(), "2026-12-01", Ok(())),
        (take(&both, "2026-12-01", ""), facts(), "2026-12-02", Err(LateEntryWithoutReason)),
    ];
    for (take, facts, today, expected) in table {
        assert_eq!(may_take(&take, &facts, day(today)), expected, "{take:?}");
    }
}

#[test]
fn missing_assigning_and_taking_more_have_their_rules() {
    use PullRefusal::*;
    assert_eq!(may_miss(&facts(), day("2026-11-30")), Err(NotYetDue("1 Dec 2026".to_string())));
    assert_eq!(may_miss(&facts(), day("2026-12-01")), Ok(()));
    assert_eq!(may_miss(&taken(Progress::default()), day("2026-12-20")), Err(PullTaken));
    assert_eq!(may_assign(&facts(), true), Ok(()));
    assert_eq!(may_assign(&taken(Progress::default()), true), Ok(()));
    assert_eq!(may_assign(&facts(), false), Err(NotAtBench));
    let cancelled = PullFacts { event: Some(Event::Cancelled), ..facts() };
    assert_eq!(may_assign(&cancelled, true), Err(PullCancelled));
    let more = take(&[Found::Here { container: 1 }], "2026-12-03", "");
    assert_eq!(may_take_more(&more, &facts()), Err(PullNotTaken));
    assert_eq!(may_take_more(&more, &taken(Progress::default())), Err(RePullWithoutReason));
    let signed = PullFacts { is_signed: true, ..taken(Progress::default()) };
    assert_eq!(may_take_more(&more, &signed), Err(PullSigned));
}
