-- A signed conclusion: what may be proposed as a shelf life, from which lots, by which answers. The whole of it is one
-- canonical document; the signature stands over that text, so inputs, choices and numbers are frozen by its digest.
create table evaluation_conclusion (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    study_arm integer not null references study_arm (id),   -- any arm of the condition it speaks of
    months integer not null check (months >= 0),            -- proposed; assigned only by the authorised person
    inputs_digest text not null,                            -- SHA-256 of the results and limits it rests on
    content text not null,                                  -- JSON: lots, reasons, answers, inputs, numbers, program
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index evaluation_conclusion_by_presentation on evaluation_conclusion (presentation);

-- The lots a conclusion speaks of, so that each finds it.
create table evaluation_conclusion_lot (
    id integer primary key,
    conclusion integer not null references evaluation_conclusion (id),
    lot integer not null references lot (id),
    left_out_because text,                                  -- null: chosen
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (conclusion, lot)
) strict;
create index evaluation_conclusion_lot_by_lot on evaluation_conclusion_lot (lot);
