-- The trail. trail_act: one row per human act. trail_change: one row per changed record, written by generated
-- triggers. trail_seal: the chain over both. All three are insert-only, also for the program's own connection; only the
-- detail of the act that is being written is filled in before its seal closes it.

create table trail_act (
    id integer primary key,
    at text not null,                       -- UTC, milliseconds
    offset_minutes integer not null,        -- the site's offset at that instant
    zone text not null,
    account integer not null references account (id) deferrable initially deferred,
    user_name text not null,                -- as it was then
    full_name text not null,
    role text,                              -- the role that permitted the act
    act text not null,
    detail text,                            -- what was done, in a sentence
    reason text,
    session text,                           -- first characters of the session's digest
    address text,
    outcome text not null check (outcome in ('done', 'denied'))
) strict;

create table trail_change (
    act integer not null references trail_act (id) deferrable initially deferred,
    line integer not null,
    record text not null,                   -- table
    row integer not null,
    kind text not null check (kind in ('insert', 'update')),
    digest blob not null,                   -- of the row after the change
    changes text,                           -- for updates: changed fields, old and new
    primary key (act, line)
) strict, without rowid;

-- Who rewrote a draft last: few lines, asked for with each version.
create index trail_change_update on trail_change (record, row, act) where kind = 'update';

create table trail_seal (
    act integer primary key references trail_act (id) deferrable initially deferred,
    digest blob not null
) strict;

-- Which acts touched which record: an index for history pages, derived from the acts, not itself evidence.
create table trail_subject (
    kind text not null,
    subject integer not null,
    act integer not null,
    primary key (kind, subject, act)
) strict, without rowid;

create trigger guard_trail_act_update before update on trail_act
when old.id is not current_act() or old.detail is not null
    or exists (select 1 from trail_seal where act = old.id)
    or (new.id, new.at, new.offset_minutes, new.zone, new.account, new.user_name, new.full_name, new.role, new.act,
        new.reason, new.session, new.address, new.outcome)
    is not (old.id, old.at, old.offset_minutes, old.zone, old.account, old.user_name, old.full_name, old.role, old.act,
        old.reason, old.session, old.address, old.outcome)
begin select raise(abort, 'the trail is never changed'); end;
create trigger guard_trail_act_delete before delete on trail_act
begin select raise(abort, 'the trail is never changed'); end;
create trigger guard_trail_change_update before update on trail_change
begin select raise(abort, 'the trail is never changed'); end;
create trigger guard_trail_change_delete before delete on trail_change
begin select raise(abort, 'the trail is never changed'); end;
create trigger guard_trail_seal_update before update on trail_seal
begin select raise(abort, 'the trail is never changed'); end;
create trigger guard_trail_seal_delete before delete on trail_seal
begin select raise(abort, 'the trail is never changed'); end;

-- The site. One data folder is one site.
create table site (
    id integer primary key check (id = 1),
    uuid blob not null,
    name text not null,
    zone text not null,
    is_demo integer not null check (is_demo in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- Settings: the newest row of a name counts.
create table setting (
    id integer primary key,
    name text not null,
    value text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index setting_by_name on setting (name, id);

-- People and system accounts. A name is never used again.
create table account (
    id integer primary key,
    user_name text not null collate nocase unique,
    full_name text not null,
    kind text not null check (kind in ('person', 'system')),
    identity_verified_by text,              -- who saw proof of identity (11.100)
    password_hash text,                     -- PHC string; null until the person has set one
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- Roles as rows: the newest set of an account counts. An empty set means no role.
create table account_roles (
    id integer primary key,
    account integer not null references account (id),
    roles text not null,                    -- comma-separated codes
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index account_roles_by_account on account_roles (account, id);

create table account_state (
    id integer primary key,
    account integer not null references account (id),
    state text not null check (state in ('enabled', 'disabled')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index account_state_by_account on account_state (account, id);

-- One-time codes: for the first administrator, or to set a password anew.
create table account_code (
    id integer primary key,
    account integer references account (id),   -- null: whoever redeems it becomes the first administrator
    code_digest text not null unique,
    expires_at text not null,
    used_at text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- Technical tables, without trail.
create table session (
    token_digest text primary key,
    account integer not null references account (id),
    started_at text not null,
    last_seen text not null,
    ended_at text,
    address text,
    agent text
) strict, without rowid;
create index session_by_account on session (account);

create table sign_in_counter (
    key text primary key,
    failures integer not null,
    last_at text not null,
    wait_until text
) strict, without rowid;

create table submission_key (
    key text primary key,
    account integer not null,
    content_digest text not null,
    act integer not null,
    location text,
    at text not null
) strict, without rowid;

create table draft (
    account integer not null,
    page text not null,
    number integer not null,
    content text not null,
    at text not null,
    primary key (account, page)
) strict, without rowid;

create table reading_log (
    id integer primary key,
    account integer not null,
    path text not null,
    at text not null
) strict;

create table counter (
    name text primary key,
    value integer not null
) strict, without rowid;

-- A signature: who, when (by its act), with which meaning, over which content.
create table signature (
    id integer primary key,
    kind text not null,                     -- of the signed record
    subject integer not null,
    meaning text not null,
    account integer not null references account (id),
    signer_name text not null,              -- frozen at signing
    digest text not null,                   -- SHA-256 of the canonical record, hexadecimal
    statement text,                         -- the signer's sentence, where one is asked
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index signature_by_subject on signature (kind, subject, meaning);

-- A system account never signs.
create trigger guard_signature_system before insert on signature
when (select kind from account where id = new.account) <> 'person'
begin select raise(abort, 'a system account cannot sign'); end;

-- Attachments live in the folder `files` under their digest.
create table attachment (
    id integer primary key,
    uuid blob not null unique,
    kind text not null,
    subject integer not null,
    file_name text not null,
    media_type text not null check (media_type in ('image/png', 'image/jpeg', 'application/pdf')),
    size_bytes integer not null check (size_bytes > 0),
    sha256 text not null,
    about text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index attachment_by_subject on attachment (kind, subject);

-- Three clicks on a photo: heights of base, interface and fill line as fractions of the picture's height.
create table photo_mark (
    id integer primary key,
    attachment integer not null references attachment (id),
    base_y text not null,
    interface_y text not null,
    fill_line_y text not null,
    base_x text,                            -- where the clicks were across; empty where heights were typed
    interface_x text,
    fill_line_x text,
    ratio text not null,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index photo_mark_by_attachment on photo_mark (attachment);
