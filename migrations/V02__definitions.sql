-- What is made, from what, how it is tested, within which limits. The content of a version is one canonical JSON
-- document: it is signed as a whole, frozen at approval, and compared field by field.

create table customer (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table product (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    dosage_form text not null,
    customer integer references customer (id),
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table presentation (
    id integer primary key,
    uuid blob not null unique,
    product integer not null references product (id),
    code text not null collate nocase unique,
    strength text not null,
    pack text not null,
    container_word text not null,           -- bottle, sachet, tube: how a container of it is called
    fill_ml text,
    market text not null,
    permeability text not null check (permeability in ('impermeable', 'semi-permeable', 'not stated')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index presentation_by_product on presentation (product);

create table material (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    function text not null,
    density_g_per_ml text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table formulation (
    id integer primary key,
    uuid blob not null unique,
    product integer not null references product (id),
    code text not null collate nocase unique,
    name text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table formulation_version (
    id integer primary key,
    uuid blob not null unique,
    formulation integer not null references formulation (id),
    number integer not null,
    reason text not null,
    content text not null,
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (formulation, number)
) strict;

create table method (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    kind text not null,                     -- appearance, redispersibility, ph, viscosity, sedimentation, sediment, numeric
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table method_version (
    id integer primary key,
    uuid blob not null unique,
    method integer not null references method (id),
    number integer not null,
    reason text not null,
    content text not null,
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (method, number)
) strict;

create table specification (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index specification_by_presentation on specification (presentation);

create table specification_version (
    id integer primary key,
    uuid blob not null unique,
    specification integer not null references specification (id),
    number integer not null,
    reason text not null,
    content text not null,
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (specification, number)
) strict;

create table protocol (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    title text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table protocol_version (
    id integer primary key,
    uuid blob not null unique,
    protocol integer not null references protocol (id),
    number integer not null,
    reason text not null,
    content text not null,
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (protocol, number)
) strict;

-- Approval freezes a version; the approver is not an author of it.
create trigger guard_formulation_version before update on formulation_version
when exists (select 1 from signature where kind = 'formulation_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
create trigger guard_method_version before update on method_version
when exists (select 1 from signature where kind = 'method_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
create trigger guard_specification_version before update on specification_version
when exists (select 1 from signature where kind = 'specification_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
create trigger guard_protocol_version before update on protocol_version
when exists (select 1 from signature where kind = 'protocol_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
create trigger guard_approval before insert on signature
when new.meaning = 'approval' and exists (
    select 1 from signature
    where kind = new.kind and subject = new.subject and meaning = 'authorship' and account = new.account)
begin select raise(abort, 'the approver is not an author'); end;

-- Shelf life is assigned, never taken from a computation.
create table shelf_life_assignment (
    id integer primary key,
    presentation integer not null references presentation (id),
    market text not null,
    storage_statement text not null,
    months integer not null check (months > 0),
    in_use_days integer check (in_use_days > 0),
    basis text not null check (basis in ('tentative', 'verified')),
    reference text not null,
    effective_from text not null,
    expiry_format text not null check (expiry_format in ('day', 'month', 'month end')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index shelf_life_by_presentation on shelf_life_assignment (presentation, effective_from);

create table instrument (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    kind text not null,                     -- pH meter, viscometer, balance, cylinder, thermometer, other
    needs_daily_check integer not null check (needs_daily_check in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- Calibrations, daily checks and states of an instrument, as rows; the newest of a kind counts.
create table instrument_event (
    id integer primary key,
    instrument integer not null references instrument (id),
    kind text not null check (kind in ('calibrated', 'daily check', 'out of service', 'in service')),
    performed_on text not null,
    due_on text,
    detail text,                            -- JSON: buffers, slope, reference
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index instrument_event_by_instrument on instrument_event (instrument, kind, id);

create table qualification (
    id integer primary key,
    account integer not null references account (id),
    method_version integer not null references method_version (id),
    starts_on text not null,
    ends_on text not null,
    reference text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index qualification_by_account on qualification (account, method_version);

-- A hard stop of a register, lifted once by QA with a reason: for one person or instrument, one method, one day.
create table stop_override (
    id integer primary key,
    stop text not null check (stop in ('calibration', 'daily check', 'out of service', 'qualification')),
    instrument integer references instrument (id),
    account integer references account (id),
    method_version integer references method_version (id),
    valid_on text not null,
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index stop_override_by_account on stop_override (account, method_version) where account is not null;
create index stop_override_by_instrument on stop_override (instrument) where instrument is not null;

-- One imported file. What it brought is marked "imported, not observed here".
create table import (
    id integer primary key,
    uuid blob not null unique,
    file_name text not null,
    sha256 text not null unique,
    row_count integer not null,
    result_count integer not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
