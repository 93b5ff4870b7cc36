-- Follow-through containers (decision A3): never opened, weighed at loading, then weighed, measured and photographed
-- at each age, so that loss of water and growth of the bed are seen on the same container.
create table container_observation (
    id integer primary key,
    container integer not null references container (id),
    pull integer references pull (id),      -- the pull whose age it belongs to; null: at loading
    weight_g text not null,                 -- exact decimals
    bed_top_mm text,                        -- height of the sediment above the base
    fill_line_mm text,                      -- height of the liquid above the base
    attachment integer references attachment (id),
    note text,
    supersedes integer unique references container_observation (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index container_observation_by_container on container_observation (container, pull);

create trigger guard_only_follow_through_is_observed before insert on container_observation
when (select purpose from container where id = new.container) <> 'follow-through'
begin select raise(abort, 'only a follow-through container is observed'); end;

create trigger guard_follow_through_is_never_opened before insert on container_event
when new.kind in ('pulled', 'partial pull', 're-pull', 'investigation')
    and (select purpose from container where id = new.container) = 'follow-through'
begin select raise(abort, 'a follow-through container is never opened'); end;
