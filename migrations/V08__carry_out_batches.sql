-- How a lot is made: its own copy of the approved master record at one batch size, and what was done step by step.

-- The record of a lot. The content is the copy, with the amounts scaled; its digest is printed on every sheet.
create table batch_record (
    id integer primary key,
    uuid blob not null unique,
    number text not null collate nocase unique,
    lot integer not null unique references lot (id),
    content text not null,
    digest text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- Closed by signature when all is done; opened again by QA with a reason. The newest row counts.
create table batch_event (
    id integer primary key,
    record integer not null references batch_record (id),
    kind text not null check (kind in ('closed', 'reopened')),
    why text,
    signature integer references signature (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index batch_event_by_record on batch_event (record);

-- What was done in a step, each entry by its own act at its own time: insert-only. A later row supersedes one, with the
-- reason of its act. `step` counts the steps of the record from 1, `run` from 1 where a step is repeated.
create table step_entry (
    id integer primary key,
    record integer not null references batch_record (id),
    step integer not null check (step > 0),
    run integer not null check (run > 0),
    kind text not null check (kind in ('started', 'weighing', 'second weighing', 'value', 'stopped', 'resumed', 'note',
        'ended', 'checked', 'skipped', 'repeated', 'answered')),
    name text not null default '',          -- of a value: as the step names it
    point text not null default '',         -- when filling: start, middle, end, after stop n
    typed text not null default '',         -- as typed
    value text,                             -- exact decimal
    unit text not null default '',
    verdict text not null check (verdict in ('within limits', 'outside limits', 'no limit')),
    limits text not null default '',        -- what it was judged by, in words
    detail text not null default '{}',      -- JSON: gross, tare and net, the balance's check, the corrected target
    material_lot integer references material_lot (id),
    stock_entry integer references stock_entry (id),
    equipment integer references equipment (id),
    instrument integer references instrument (id),
    deviation integer references deviation (id),
    answers integer references step_entry (id),     -- the entry this one speaks of
    happened_at text,                       -- when it was done, if not at the act itself (late entry)
    supersedes integer unique references step_entry (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index step_entry_by_record on step_entry (record, step, run);
create index step_entry_by_material_lot on step_entry (material_lot) where material_lot is not null;
create index step_entry_by_deviation on step_entry (deviation) where deviation is not null;

-- Who did a step does not check it, and who checked it does no part of it.
create trigger guard_step_checker_is_not_doer before insert on step_entry
when new.kind in ('checked', 'second weighing') and exists (
    select 1 from step_entry
    where record = new.record and step = new.step and run = new.run and account = new.account
        and kind in ('started', 'weighing', 'value', 'stopped', 'resumed', 'ended'))
begin select raise(abort, 'the checker is a doer of the step'); end;
create trigger guard_step_doer_is_not_checker before insert on step_entry
when new.kind in ('started', 'weighing', 'value', 'stopped', 'resumed', 'ended') and exists (
    select 1 from step_entry
    where record = new.record and step = new.step and run = new.run and account = new.account
        and kind in ('checked', 'second weighing'))
begin select raise(abort, 'the doer is a checker of the step'); end;
create trigger guard_step_of_closed_record before insert on step_entry
when (select kind from batch_event where record = new.record order by id desc limit 1) = 'closed'
begin select raise(abort, 'the record is closed'); end;

-- What a phase gave, worked out by one person. The newest row of a phase counts.
create table phase_yield (
    id integer primary key,
    record integer not null references batch_record (id),
    phase integer not null check (phase > 0),
    actual text not null,
    samples text not null,
    rejects text not null,
    waste text not null,
    unit text not null,
    theoretical text not null,
    percent text not null,                  -- 100 actual ÷ theoretical, two decimals
    accountable_percent text not null,      -- with samples, rejects and known waste
    verdict text not null check (verdict in ('within limits', 'outside limits')),
    limits text not null,
    deviation integer references deviation (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index phase_yield_by_record on phase_yield (record, phase);
create trigger guard_yield_of_closed_record before insert on phase_yield
when (select kind from batch_event where record = new.record order by id desc limit 1) = 'closed'
begin select raise(abort, 'the record is closed'); end;

-- A second person worked it out again.
create table phase_yield_check (
    id integer primary key,
    phase_yield integer not null unique references phase_yield (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create trigger guard_yield_checker_is_another before insert on phase_yield_check
when exists (select 1 from phase_yield where id = new.phase_yield and account = new.account)
begin select raise(abort, 'who worked out the yield does not check it'); end;

-- Records in the making, so that lists never walk the closed years. Kept by triggers, derived and not itself a record.
create table open_batch (
    record integer primary key references batch_record (id)
) strict;
create trigger open_batch_started after insert on batch_record
begin
    insert or ignore into open_batch (record) values (new.id);
end;
create trigger open_batch_closed after insert on batch_event
when new.kind = 'closed'
begin
    delete from open_batch where record = new.record;
end;
create trigger open_batch_reopened after insert on batch_event
when new.kind = 'reopened'
begin
    insert or ignore into open_batch (record) values (new.record);
end;
create trigger open_batch_decided after insert on lot_decision
begin
    delete from open_batch where record = (select id from batch_record where lot = new.lot);
end;
