-- The formulator's rack: up to twelve development lots that are put up on one day and looked at side by side. Nothing on a
-- rack takes part in an official evaluation.
create table rack (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    title text not null,
    started_on text not null,               -- time zero of every lot on it
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

create table rack_lot (
    id integer primary key,
    rack integer not null references rack (id),
    lot integer not null unique references lot (id),
    position integer not null check (position between 1 and 12),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (rack, position)
) strict;
