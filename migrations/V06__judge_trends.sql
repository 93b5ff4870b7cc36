-- Whether a result follows the trend of its product: which versions count as alike, what a person left out of the
-- history, the forecasts sealed before the readings, and the verdicts with the history they rest on.

-- Two versions of a formulation or of a method whose results count as one history. Signed; the newest row of a pair
-- counts. It is no chain: each pair is declared by itself.
create table trend_equivalence (
    id integer primary key,
    kind text not null check (kind in ('formulation version', 'method version')),
    one integer not null,
    other integer not null check (other > one),
    state text not null check (state in ('declared', 'withdrawn')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index trend_equivalence_by_pair on trend_equivalence (kind, one, other);

-- A person left a result out of all histories, or took it back in. The newest row of a test and component counts.
create table trend_exclusion (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    component text not null,
    state text not null check (state in ('left out', 'taken back')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index trend_exclusion_by_test on trend_exclusion (sample_test, component);

-- A history as it was used: which results of which lots, at which ages, and which were left out. Canonical JSON,
-- stored once however many verdicts rest on it.
create table trend_history (
    id integer primary key,
    digest text not null unique,
    content text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- The forecasts of a pull's tests were sealed, by the clock, when its window opened or as soon after as it ran.
create table trend_seal (
    id integer primary key,
    pull integer not null unique references pull (id),
    window_opened_on text not null,
    days_late integer not null check (days_late >= 0),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

-- One forecast: shown to nobody until the test has a reading. `content` is canonical JSON, `digest` is over it.
create table trend_forecast (
    id integer primary key,
    seal integer not null references trend_seal (id),
    sample_test integer not null references sample_test (id),
    component text not null,
    content text not null,
    digest text not null,
    history integer references trend_history (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (sample_test, component)
) strict;
create index trend_forecast_by_seal on trend_forecast (seal);

-- A verdict on one version of a result. H: this result (A where there is no history); HL: the lot's trend; HS: whether
-- the lot's mean will leave its limits before expiry. A correction makes the next version and its own verdicts.
create table trend_verdict (
    id integer primary key,
    result integer not null references result (id),
    rule text not null check (rule in ('H', 'A', 'HL', 'HS')),
    verdict text not null check (verdict in ('not evaluable', 'in trend', 'alert', 'action', 'no warning', 'likely',
        'very likely')),
    sentence text not null,
    age_days integer not null,
    needs text,                             -- what is missing, for a verdict that could not be given
    lower text,                             -- of the band outside which a result is an alert; centre is the median
    centre text,
    upper text,
    action_lower text,
    action_upper text,
    degrees_of_freedom text,
    probability text,                       -- two-sided p; for HS that the mean is outside at expiry
    alert_level text,
    action_level text,
    month integer,                          -- HS: the first whole month with the mean more likely outside than inside
    history integer references trend_history (id),
    forecast integer references trend_forecast (id),
    judged_on text not null,
    detail text not null,                   -- JSON: context rules, history screen, weights, how the forecast was sealed
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
create index trend_verdict_by_result on trend_verdict (result);
create index trend_verdict_by_day on trend_verdict (judged_on, verdict) where rule in ('H', 'A');
