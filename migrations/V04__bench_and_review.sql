-- Samples, the tests asked of them, what was read, what was judged, who checked and who signed.

-- Every test hangs on a sample with a purpose. A pull has exactly one sample, made with it.
create table sample (
    id integer primary key,
    uuid blob not null unique,
    number text not null collate nocase unique,
    purpose text not null check (purpose in ('stability pull', 'release', 'in-process', 'bulk hold',
        'retain check', 'investigation', 'complaint', 'development')),
    lot integer not null references lot (id),
    pull integer unique references pull (id),
    specification_version integer references specification_version (id),
    limit_set text not null check (limit_set in ('release', 'shelf-life', 'none')),
    containers integer,
    condition_on_receipt text,
    handed_over_by text,
    received_on text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index sample_by_lot on sample (lot);

-- A test asked of a sample, by a method version. `test` is the code that limits and charts go by.
create table sample_test (
    id integer primary key,
    sample integer not null references sample (id),
    position integer not null,
    test text not null,
    title text not null,
    method_version integer not null references method_version (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (sample, test)
) strict;
create index sample_test_by_test on sample_test (test, sample);

-- A stage of one container passed on without its readings: "lost, because …".
create table stage_loss (
    id integer primary key,
    sample integer not null references sample (id),
    container integer references container (id),
    stage text not null check (stage in ('before disturbance', 'redispersion', 'after redispersion')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index stage_loss_by_sample on stage_loss (sample);

-- A reading is an observation as soon as it is recorded: insert-only. A later row supersedes it, with a reason.
-- `field` names what was read ("value", "spindle", "torque", "temperature", "volume at 30 min", "caking" …).
create table reading (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    container integer references container (id),
    replicate integer not null,
    field text not null,
    typed text not null,                    -- as typed
    value text,                             -- exact decimal; null for words and for what could not be read
    qualifier text not null check (qualifier in ('=', '>', '<', 'words', 'not read')),
    read_at text,                           -- when it was read, if not at the act itself (late entry)
    due_at text,                            -- planned instant of a timed reading
    inspected_every integer check (inspected_every > 1), -- a count seen only after each so many: known to this
    instrument integer references instrument (id),
    hints text,                             -- JSON: the hints it drew
    hint_answer text check (hint_answer in ('kept', 'changed after hint')),
    supersedes integer unique references reading (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index reading_by_test on reading (sample_test, replicate, field);

-- A completed test: what is reported, by whom, from the readings as they stood. A correction makes the next version.
-- One row per component; a single-value test has the component ''.
create table result (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    version integer not null,
    component text not null,
    value text,                             -- the unrounded exact value that is judged
    qualifier text not null check (qualifier in ('=', '>', '<', 'words', 'none')),
    shown text not null,                    -- rounded as the method says, or the words
    unit text not null,
    verdict text not null check (verdict in ('conforms', 'out of specification', 'outside in-use limit', 'no limit', 'no reportable value',
        'not judged')),
    detail text not null,                   -- JSON: replicates used, mean, spread, limits, way of comparing
    sd text,                                -- imported means carry their spread and number
    n integer,
    imported integer references import (id),
    import_line integer,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (sample_test, version, component)
) strict;

-- What a judgement found, as a row with its numbers.
create table flag (
    id integer primary key,
    result integer not null references result (id),
    kind text not null,                     -- out of specification, out of trend, not evaluable, spread, single value outside,
                                            -- soft stop, late reading, in-use limit, first value outside
    level text not null check (level in ('exception', 'mark', 'context')),
    sentence text not null,
    numbers text not null,                  -- JSON
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index flag_by_result on flag (result);

create table investigation (
    id integer primary key,
    uuid blob not null unique,
    number integer not null unique,
    result integer not null references result (id),
    first_known_at text not null,
    steered_by integer references account (id),
    clock_due_on text,                      -- three working days, where the rule asks it
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index investigation_by_result on investigation (result);

create table investigation_entry (
    id integer primary key,
    investigation integer not null references investigation (id),
    kind text not null check (kind in ('finding', 'evidence', 'other lot considered', 'steered by', 'conclusion')),
    text text not null,
    other_lot integer references lot (id),
    account integer references account (id),
    signature integer references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index investigation_entry_by_investigation on investigation_entry (investigation);

-- The laboratory check by a second qualified person, or sending the test back. It speaks of one version of a test.
create table result_check (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    version integer not null,
    verdict text not null check (verdict in ('checked', 'sent back')),
    why text,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index result_check_by_test on result_check (sample_test);

-- Nobody checks what they read.
create trigger guard_checker_is_not_reader before insert on result_check
when new.verdict = 'checked' and exists (
    select 1 from reading r join trail_act a on a.id = r.act
    where r.sample_test = new.sample_test and a.account = new.account)
begin select raise(abort, 'the checker is not a reader'); end;

-- A reviewer's answer to an exception: of a flag, or of what the record itself shows (`about`: "corrections 2",
-- "late pull"). Another correction makes another `about`, so an old answer does not cover it.
create table exception_answer (
    id integer primary key,
    sample integer not null references sample (id),
    flag integer references flag (id),
    about text not null,
    answer text not null,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index exception_answer_by_sample on exception_answer (sample);
create index exception_answer_by_flag on exception_answer (flag) where flag is not null;

-- What a reviewer decided after looking at a sample's whole content, named by its digest.
create table review_decision (
    id integer primary key,
    sample integer not null references sample (id),
    decision text not null check (decision in ('agree', 'send back', 'not yet')),
    content_digest text not null,
    why text,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index review_decision_by_sample on review_decision (sample);

-- A reviewer does not sign what they read or checked.
create trigger guard_reviewer_is_not_performer before insert on signature
when new.kind = 'sample' and new.meaning = 'review' and (exists (
    select 1 from reading r join sample_test t on t.id = r.sample_test join trail_act a on a.id = r.act
    where t.sample = new.subject and a.account = new.account) or exists (
    select 1 from result_check c join sample_test t on t.id = c.sample_test
    where t.sample = new.subject and c.account = new.account and c.verdict = 'checked'))
begin select raise(abort, 'the reviewer is not a performer'); end;

-- A pull asks for no more work at the bench once every test has a result that was not sent back.
create trigger open_pull_tested after insert on result
begin
    delete from open_pull
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test)
        and not exists (
            select 1 from sample_test o
            where o.sample = (select sample from sample_test where id = new.sample_test)
                and (not exists (select 1 from result where sample_test = o.id)
                    or (select verdict from result_check where sample_test = o.id and version =
                            (select max(version) from result where sample_test = o.id)
                        order by id desc limit 1) = 'sent back'));
end;
create trigger open_pull_sent_back after insert on result_check
when new.verdict = 'sent back'
begin
    insert or ignore into open_pull (pull, stage, due_on, latest_on, account)
    select p.id, 'in test', p.due_on, date(e.happened_on, coalesce(p.test_within_days, 0) || ' days'),
        (select account from pull_assignment where pull = p.id order by id desc limit 1)
    from sample_test t
    join sample s on s.id = t.sample
    join pull p on p.id = s.pull
    join pull_event e on e.pull = p.id and e.kind = 'pulled'
    where t.id = new.sample_test and p.imported is null;
end;
create trigger open_pull_asked after insert on sample_test
begin
    update open_pull
    set minutes = minutes + coalesce((select json_extract(content, '$.hands_on_minutes')
        from method_version where id = new.method_version), 0)
    where pull = (select pull from sample where id = new.sample);
end;

-- Samples that still ask for something: taken or come in, or changed since, and no reviewer's signature after it. Kept by
-- triggers so that the lists of the bench and of the reviewer never walk the signed years behind them; derived and
-- not itself a record.
create table open_sample (
    sample integer primary key references sample (id)
) strict;

create trigger open_sample_received after insert on sample
when new.pull is null
begin
    insert or ignore into open_sample (sample) values (new.id);
end;
create trigger open_sample_pulled after insert on pull_event
when new.kind = 'pulled'
begin
    insert or ignore into open_sample (sample)
    select s.id from pull p join sample s on s.pull = p.id where p.id = new.pull and p.imported is null;
end;
create trigger open_sample_result after insert on result
when new.imported is null
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
create trigger open_sample_check after insert on result_check
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
create trigger open_sample_reading after insert on reading
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
create trigger open_sample_answer after insert on exception_answer
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;
create trigger open_sample_loss after insert on stage_loss
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;
create trigger open_sample_signed after insert on signature
when new.kind = 'sample' and new.meaning = 'review'
begin
    delete from open_sample where sample = new.subject;
end;

-- Tests whose newest result waits for the laboratory check, so that the week and the queue never walk all results.
-- An index over the rows above, kept by triggers, derived and not itself a record.
create table open_check (
    sample_test integer primary key references sample_test (id)
) strict;
create trigger open_check_asked after insert on result
when new.imported is null and (select json_extract(v.content, '$.needs_check')
    from sample_test t join method_version v on v.id = t.method_version where t.id = new.sample_test) = 1
begin
    insert or ignore into open_check (sample_test) values (new.sample_test);
end;
create trigger open_check_answered after insert on result_check
begin
    delete from open_check where sample_test = new.sample_test;
end;
