-- What lots are made from and made in, what went otherwise than planned, and what a release asks for.

-- A material as one delivery brought it. The internal number is on its label and is never used twice.
create table material_lot (
    id integer primary key,
    uuid blob not null unique,
    material integer not null references material (id),
    number text not null collate nocase unique,
    supplier text not null,
    supplier_lot text not null,
    received_on text not null,
    quantity text not null,                 -- as received
    unit text not null,
    packages integer,                       -- drums, bags, bottles of the delivery
    retest_on text,                         -- last day before it is tested again; a release may name a later one
    expires_on text,                        -- last day of use, never moved
    location text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index material_lot_by_material on material_lot (material);

-- Assay and water by which a dispensed amount is corrected. The newest row counts.
create table material_lot_assay (
    id integer primary key,
    material_lot integer not null references material_lot (id),
    assay text,
    assay_unit text,
    assay_basis text check (assay_basis in ('as is', 'anhydrous', 'dried')),
    water text,                             -- water or loss on drying
    water_unit text,
    reference text not null,                -- certificate or test record
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index material_lot_assay_by_lot on material_lot_assay (material_lot);

-- Where a material lot stands: the newest row counts. It comes in under quarantine; every later state is signed.
create table material_lot_status (
    id integer primary key,
    material_lot integer not null references material_lot (id),
    status text not null check (status in ('quarantine', 'released', 'rejected', 'used up')),
    retest_on text,                         -- from now on, where a release follows a retest
    why text not null,
    signature integer references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index material_lot_status_by_lot on material_lot_status (material_lot);
create trigger guard_material_status_is_signed before insert on material_lot_status
when new.signature is null and exists (select 1 from material_lot_status where material_lot = new.material_lot)
begin select raise(abort, 'a later status of a material lot is signed'); end;

-- The ledger of a material lot, in its unit: what went in (more than zero) and out (less than zero), and the balance
-- after it. A balance follows from the one before and is never below zero.
create table stock_entry (
    id integer primary key,
    material_lot integer not null references material_lot (id),
    kind text not null check (kind in ('received', 'dispensed', 'adjusted', 'destroyed', 'returned')),
    quantity text not null,
    balance text not null,
    lot integer references lot (id),        -- dispensed to it, or returned from it
    why text,
    witness integer references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index stock_entry_by_material_lot on stock_entry (material_lot);
create index stock_entry_by_lot on stock_entry (lot) where lot is not null;
create trigger guard_stock_follows before insert on stock_entry
when not sums_to(coalesce((select balance from stock_entry where material_lot = new.material_lot
    order by id desc limit 1), '0'), new.quantity, new.balance)
begin select raise(abort, 'the balance does not follow from the one before'); end;
create trigger guard_stock_not_below_zero before insert on stock_entry
when cast(new.balance as real) < 0
begin select raise(abort, 'a material lot never holds less than nothing'); end;
create trigger guard_stock_direction before insert on stock_entry
when (new.kind in ('received', 'returned') and cast(new.quantity as real) <= 0)
    or (new.kind in ('dispensed', 'destroyed') and cast(new.quantity as real) >= 0)
begin select raise(abort, 'what comes in is more than zero, what goes out less'); end;

-- What lots are made in.
create table equipment (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    class text not null,                    -- as the steps of a master record name it
    location text not null,
    clean_hold_days integer not null,       -- how long it stays clean unused
    campaign_days integer not null,         -- how long lots of one product may follow without cleaning; 0: never
    needs_clean_check integer not null check (needs_clean_check in (0, 1)),
    needs_calibration integer not null check (needs_calibration in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- What happened to it, in its order. The newest event of a kind counts.
create table equipment_event (
    id integer primary key,
    equipment integer not null references equipment (id),
    kind text not null check (kind in ('cleaned', 'checked clean', 'used', 'calibrated', 'out of service',
        'in service')),
    happened_on text not null,
    due_on text,                            -- of a calibration: the last day it holds
    lot integer references lot (id),        -- it was used in
    cleaning integer references equipment_event (id),   -- that was checked
    account integer not null references account (id),
    note text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index equipment_event_by_equipment on equipment_event (equipment, kind);
create index equipment_event_by_lot on equipment_event (lot) where lot is not null;
create trigger guard_cleaner_does_not_check before insert on equipment_event
when new.kind = 'checked clean'
    and exists (select 1 from equipment_event where id = new.cleaning and account = new.account)
begin select raise(abort, 'who cleaned does not check'); end;

-- What went otherwise than planned.
create table deviation (
    id integer primary key,
    uuid blob not null unique,
    number integer not null unique,
    title text not null,
    described text not null,
    occurred_on text not null,
    lot integer references lot (id),
    step integer,                           -- of the lot's batch record, where it came from one
    step_words text,
    material_lot integer references material_lot (id),
    equipment integer references equipment (id),
    study integer references study (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index deviation_by_lot on deviation (lot) where lot is not null;

-- The working record of a deviation. The newest class and the newest answer on stability count; a closure is the last.
create table deviation_entry (
    id integer primary key,
    deviation integer not null references deviation (id),
    kind text not null check (kind in ('classified', 'cause', 'action', 'other lot considered', 'other lots assessed',
        'added to stability', 'not added to stability', 'continued', 'closed')),
    class text check (class in ('minor', 'major', 'critical')),
    text text not null,
    other_lot integer references lot (id),
    study integer references study (id),
    signature integer references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index deviation_entry_by_deviation on deviation_entry (deviation);
create trigger guard_closed_deviation before insert on deviation_entry
when exists (select 1 from deviation_entry where deviation = new.deviation and kind = 'closed')
begin select raise(abort, 'the deviation is closed'); end;

-- Containers, closures and labels of a lot: what is counted, and within which limits it must come out.
create table packaging_item (
    id integer primary key,
    lot integer not null references lot (id),
    kind text not null check (kind in ('container', 'closure', 'label', 'carton', 'leaflet', 'other')),
    name text not null,
    material_lot integer references material_lot (id),
    least_percent text not null,            -- accounted for, of what was issued
    most_percent text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index packaging_item_by_lot on packaging_item (lot);

-- Each count as it was made. A correction supersedes.
create table packaging_entry (
    id integer primary key,
    item integer not null references packaging_item (id),
    kind text not null check (kind in ('issued', 'used', 'sampled', 'destroyed', 'returned')),
    count integer not null check (count >= 0),
    supersedes integer unique references packaging_entry (id),
    why text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index packaging_entry_by_item on packaging_entry (item);

-- The reconciliation, worked out and checked by a second person. The newest row of an item counts.
create table packaging_check (
    id integer primary key,
    item integer not null references packaging_item (id),
    issued integer not null,
    accounted integer not null,
    percent text not null,
    newest_entry integer not null references packaging_entry (id),      -- later counts ask for a new check
    deviation integer references deviation (id),                        -- opened where it is outside its limits
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index packaging_check_by_item on packaging_check (item);
create trigger guard_counter_does_not_check before insert on packaging_check
when exists (select 1 from packaging_entry e join trail_act a on a.id = e.act
    where e.item = new.item and a.account = new.account)
begin select raise(abort, 'who counted does not check'); end;

-- Retain samples (21 CFR 211.170): kept, looked at once a year, thrown away only after their day.
create table retain (
    id integer primary key,
    uuid blob not null unique,
    lot integer not null references lot (id),
    number text not null collate nocase unique,
    containers integer not null check (containers > 0),
    quantity text not null,
    unit text not null,
    test_quantity text not null,            -- what one set of all tests takes, in the same unit
    location text not null,
    stored_on text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index retain_by_lot on retain (lot);

create table retain_event (
    id integer primary key,
    retain integer not null references retain (id),
    kind text not null check (kind in ('looked at', 'taken', 'discarded')),
    happened_on text not null,
    is_changed integer check (is_changed in (0, 1)),
    containers integer,
    note text,
    deviation integer references deviation (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index retain_event_by_retain on retain_event (retain);

-- Where the executed record of a lot is kept that was not carried out here. The newest row counts.
create table record_elsewhere (
    id integer primary key,
    lot integer not null references lot (id),
    reference text not null,
    place text not null,
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index record_elsewhere_by_lot on record_elsewhere (lot);

-- What a person states on one of the thirteen items of 21 CFR 211.188 (b). The newest row of an item counts.
create table completeness_answer (
    id integer primary key,
    lot integer not null references lot (id),
    item integer not null check (item between 1 and 13),
    answer text not null check (answer in ('present', 'not applicable', 'withdrawn')),
    text text not null,                     -- where it stands, or why it does not apply
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index completeness_answer_by_lot on completeness_answer (lot, item);

-- What the person who decided on a lot had before them: the corrections and the trail up to an act.
create table lot_review (
    id integer primary key,
    lot integer not null references lot (id),
    up_to_act integer not null references trail_act (id),
    corrections integer not null,
    digest text not null,                   -- of the corrections, the items and the deviations as they were shown
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index lot_review_by_lot on lot_review (lot);

-- Certificates of analysis: a whole document per version, signed.
create table certificate (
    id integer primary key,
    uuid blob not null unique,
    lot integer not null references lot (id),
    version integer not null,
    why text,                               -- what is new, from the second version on
    content text not null,
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (lot, version)
) strict;

-- Blank sheets for a network failure: numbered, given to a person, accounted for one by one.
create table blank_sheet (
    id integer primary key,
    number integer not null unique,
    purpose text not null,
    lot integer references lot (id),
    issued_to integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table blank_sheet_event (
    id integer primary key,
    blank_sheet integer not null references blank_sheet (id),
    kind text not null check (kind in ('returned', 'voided', 'transcribed', 'verified')),
    text text not null,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (blank_sheet, kind)
) strict;
create trigger guard_transcriber_does_not_verify before insert on blank_sheet_event
when new.kind = 'verified' and exists (select 1 from blank_sheet_event
    where blank_sheet = new.blank_sheet and kind = 'transcribed' and account = new.account)
begin select raise(abort, 'who transcribed does not verify'); end;
