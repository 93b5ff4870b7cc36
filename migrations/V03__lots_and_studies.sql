-- What was made, how its ageing is planned, and the containers and pulls of that plan.

create table lot (
    id integer primary key,
    uuid blob not null unique,
    number text not null collate nocase unique,
    presentation integer not null references presentation (id),
    formulation_version integer not null references formulation_version (id),
    formulation_digest text not null,       -- of the version's content when the lot was made
    made_on text,                           -- calendar date of the site; null only for imported lots
    size text,
    size_unit text,
    scale text not null check (scale in ('laboratory', 'pilot', 'production', 'not stated')),
    container_closure text not null,
    bulk_lot integer references lot (id),   -- a packed lot inherits the history of its bulk lot
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index lot_by_presentation on lot (presentation);
create index lot_by_bulk_lot on lot (bulk_lot) where bulk_lot is not null;

create table lot_distribution (
    id integer primary key,
    lot integer not null references lot (id),
    first_on text not null,
    markets text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index lot_distribution_by_lot on lot_distribution (lot);

-- The authorised person's decision, by signature. The newest row counts.
create table lot_decision (
    id integer primary key,
    lot integer not null references lot (id),
    decision text not null check (decision in ('released', 'rejected')),
    decided_on text not null,
    shelf_life_assignment integer references shelf_life_assignment (id),
    expires_on text,
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index lot_decision_by_lot on lot_decision (lot);

create table condition (
    id integer primary key,
    code text not null unique,              -- 25/60
    name text not null,                     -- 25 °C/60 % RH
    temperature_c text,
    temperature_tolerance_c text,
    humidity_percent text,
    humidity_tolerance_percent text,
    humidity_rule text not null check (humidity_rule in ('within', 'not more than', 'none')),
    use text not null,                      -- long-term, intermediate, accelerated …, as the catalogue states
    least_months integer,
    source text not null,                   -- requirement row, or "imported"
    in_catalogue integer not null check (in_catalogue in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table chamber (
    id integer primary key,
    code text not null collate nocase unique,
    name text not null,
    condition integer not null references condition (id),
    location text not null,
    qualification_due_on text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table study (
    id integer primary key,
    uuid blob not null unique,
    number text not null collate nocase unique,
    lot integer not null references lot (id),
    protocol_version integer references protocol_version (id),          -- null only for imported studies
    specification_version integer references specification_version (id),
    programme text not null check (programme in ('primary', 'commitment', 'ongoing', 'development', 'imported')),
    started_on text,                        -- time zero; null only for imported studies
    rule_set text not null,                 -- the rules it is evaluated by, name and version
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index study_by_lot on study (lot);

-- A newer approved version of the protocol, for the pulls still to be taken. The newest row counts.
create table study_amendment (
    id integer primary key,
    study integer not null references study (id),
    protocol_version integer not null references protocol_version (id),
    specification_version integer not null references specification_version (id),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index study_amendment_by_study on study_amendment (study);

create table study_arm (
    id integer primary key,
    study integer not null references study (id),
    position integer not null,
    condition integer not null references condition (id),
    orientation text not null check (orientation in ('upright', 'inverted', 'horizontal', 'not stated')),
    chamber integer references chamber (id),
    limits_do text not null check (limits_do in ('OOS', 'significant-change rules', 'information', 'in-use limits')),
    is_labelled_condition integer not null check (is_labelled_condition in (0, 1)),
    is_contingent integer not null check (is_contingent in (0, 1)),
    container_text text,                    -- the pack as an imported file names it
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (study, position)
) strict;

-- A contingent arm is placed at time zero and tested only when triggered.
create table arm_trigger (
    id integer primary key,
    study_arm integer not null references study_arm (id),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index arm_trigger_by_arm on arm_trigger (study_arm);

-- Each container on study has its own number and label.
create table container (
    id integer primary key,
    study_arm integer not null references study_arm (id),
    number integer not null,
    label text not null collate nocase unique,
    purpose text not null check (purpose in ('pull', 'spare', 'retain', 'follow-through')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (study_arm, number)
) strict;

-- A planned pull: an age of an arm, its due date and its window, all calendar dates of the site.
create table pull (
    id integer primary key,
    uuid blob not null unique,
    study_arm integer not null references study_arm (id),
    age_months integer,
    age_days integer,                       -- in-use and imported ages are days
    age_text text not null,                 -- "18 months", "day 14"
    due_on text,                            -- null only for imported pulls
    earliest_on text,
    latest_on text,
    test_within_days integer,
    containers_needed integer not null,
    is_last integer not null check (is_last in (0, 1)),
    supersedes integer unique references pull (id),     -- planned in its place by an amendment
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index pull_by_arm on pull (study_arm);
create index pull_by_due on pull (latest_on, due_on);

-- What happened to a pull. The newest row states where it is; a pull without a row is planned.
create table pull_event (
    id integer primary key,
    pull integer not null references pull (id),
    kind text not null check (kind in ('pulled', 'missed', 'cancelled')),
    happened_at text,                       -- when containers left the chamber, if not at the act itself
    happened_on text not null,              -- the site's date of it
    identity_by text,                       -- scan, typed characters
    note text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index pull_event_by_pull on pull_event (pull);

create table pull_assignment (
    id integer primary key,
    pull integer not null references pull (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index pull_assignment_by_pull on pull_assignment (pull);

-- The sample ledger: a container leaves at most once.
create table container_event (
    id integer primary key,
    container integer not null references container (id),
    kind text not null check (kind in ('pulled', 'broken', 'leaked', 'lost', 'investigation', 'partial pull',
        're-pull', 'destroyed')),
    pull integer references pull (id),
    witness integer references account (id),
    note text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index container_event_by_container on container_event (container);
create index container_event_by_pull on container_event (pull) where pull is not null;
create trigger guard_container_leaves_once before insert on container_event
when exists (select 1 from container_event
    where container = new.container and (new.kind <> 'destroyed' or kind = 'destroyed'))
begin select raise(abort, 'the container has left already'); end;

-- Pulls that still ask for work, so that the week never walks the years behind it. An index over the rows above,
-- kept by triggers, derived and not itself a record.
create table open_pull (
    pull integer primary key references pull (id),
    stage text not null check (stage in ('to take', 'in test')),
    due_on text not null,
    latest_on text not null,                -- the last day to take it, then the last day to test it
    minutes integer not null default 0,     -- at the bench, from the methods of its tests
    account integer references account (id) -- who has it
) strict;
create index open_pull_by_latest on open_pull (stage, latest_on, pull, due_on);
create index open_pull_by_due on open_pull (stage, due_on, latest_on, minutes);

create trigger open_pull_planned after insert on pull
when new.imported is null and new.due_on is not null
begin
    insert into open_pull (pull, stage, due_on, latest_on)
    values (new.id, 'to take', new.due_on, coalesce(new.latest_on, new.due_on));
end;
create trigger open_pull_happened after insert on pull_event
begin
    delete from open_pull where pull = new.pull and new.kind <> 'pulled';
    update open_pull set stage = 'in test', latest_on = date(new.happened_on,
        (select coalesce(test_within_days, 0) || ' days' from pull where id = new.pull))
    where pull = new.pull;
end;
create trigger open_pull_assigned after insert on pull_assignment
begin
    update open_pull set account = new.account where pull = new.pull;
end;

-- Who has what: the few pulls that somebody was given.
create index open_pull_of_people on open_pull (stage, due_on, account, minutes) where account is not null;

-- How many pulls stand open by their days: the counts of the week without walking its pulls. Derived as open_pull is.
create table open_day (
    stage text not null,
    due_on text not null,
    latest_on text not null,
    pulls integer not null,
    minutes integer not null,
    primary key (stage, due_on, latest_on)
) strict, without rowid;

create trigger open_day_more after insert on open_pull
begin
    insert or ignore into open_day (stage, due_on, latest_on, pulls, minutes)
    values (new.stage, new.due_on, new.latest_on, 0, 0);
    update open_day set pulls = pulls + 1, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on and latest_on = new.latest_on;
end;
create trigger open_day_fewer after delete on open_pull
begin
    update open_day set pulls = pulls - 1, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on;
    delete from open_day
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on and pulls = 0;
end;
create trigger open_day_moved after update of stage, due_on, latest_on, minutes on open_pull
begin
    insert or ignore into open_day (stage, due_on, latest_on, pulls, minutes)
    values (new.stage, new.due_on, new.latest_on, 0, 0);
    update open_day set pulls = pulls + 1, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on and latest_on = new.latest_on;
    update open_day set pulls = pulls - 1, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on;
    delete from open_day
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on and pulls = 0;
end;
