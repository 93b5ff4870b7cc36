CREATE INDEX account_roles_by_account on account_roles (account, id);

CREATE INDEX account_state_by_account on account_state (account, id);

CREATE INDEX arm_trigger_by_arm on arm_trigger (study_arm);

CREATE INDEX attachment_by_subject on attachment (kind, subject);

CREATE INDEX batch_event_by_record on batch_event (record);

CREATE INDEX completeness_answer_by_lot on completeness_answer (lot, item);

CREATE INDEX container_event_by_container on container_event (container);

CREATE INDEX container_event_by_pull on container_event (pull) where pull is not null;

CREATE INDEX container_observation_by_container on container_observation (container, pull);

CREATE INDEX deviation_by_lot on deviation (lot) where lot is not null;

CREATE INDEX deviation_entry_by_deviation on deviation_entry (deviation);

CREATE INDEX equipment_event_by_equipment on equipment_event (equipment, kind);

CREATE INDEX equipment_event_by_lot on equipment_event (lot) where lot is not null;

CREATE INDEX evaluation_conclusion_by_presentation on evaluation_conclusion (presentation);

CREATE INDEX evaluation_conclusion_lot_by_lot on evaluation_conclusion_lot (lot);

CREATE INDEX exception_answer_by_flag on exception_answer (flag) where flag is not null;

CREATE INDEX exception_answer_by_sample on exception_answer (sample);

CREATE INDEX flag_by_result on flag (result);

CREATE INDEX instrument_event_by_instrument on instrument_event (instrument, kind, id);

CREATE INDEX investigation_by_result on investigation (result);

CREATE INDEX investigation_entry_by_investigation on investigation_entry (investigation);

CREATE INDEX lot_by_bulk_lot on lot (bulk_lot) where bulk_lot is not null;

CREATE INDEX lot_by_presentation on lot (presentation);

CREATE INDEX lot_decision_by_lot on lot_decision (lot);

CREATE INDEX lot_distribution_by_lot on lot_distribution (lot);

CREATE INDEX lot_review_by_lot on lot_review (lot);

CREATE INDEX material_lot_assay_by_lot on material_lot_assay (material_lot);

CREATE INDEX material_lot_by_material on material_lot (material);

CREATE INDEX material_lot_status_by_lot on material_lot_status (material_lot);

CREATE INDEX open_day_by_latest on open_day (stage, latest_on, due_on, pulls);

CREATE INDEX open_pull_by_due on open_pull (stage, due_on, pull, latest_on);

CREATE INDEX open_pull_by_latest on open_pull (stage, latest_on, pull, due_on);

CREATE INDEX open_pull_of_people on open_pull (stage, due_on, account, minutes) where account is not null;

CREATE INDEX packaging_check_by_item on packaging_check (item);

CREATE INDEX packaging_entry_by_item on packaging_entry (item);

CREATE INDEX packaging_item_by_lot on packaging_item (lot);

CREATE INDEX phase_yield_by_record on phase_yield (record, phase);

CREATE INDEX photo_mark_by_attachment on photo_mark (attachment);

CREATE INDEX presentation_by_product on presentation (product);

CREATE INDEX pull_assignment_by_pull on pull_assignment (pull);

CREATE INDEX pull_by_arm on pull (study_arm);

CREATE INDEX pull_by_due on pull (latest_on, due_on);

CREATE INDEX pull_event_by_pull on pull_event (pull);

CREATE INDEX qualification_by_account on qualification (account, method_version);

CREATE INDEX reading_by_test on reading (sample_test, replicate, field);

CREATE INDEX record_elsewhere_by_lot on record_elsewhere (lot);

CREATE INDEX result_check_by_test on result_check (sample_test);

CREATE INDEX retain_by_lot on retain (lot);

CREATE INDEX retain_event_by_retain on retain_event (retain);

CREATE INDEX review_decision_by_sample on review_decision (sample);

CREATE INDEX sample_by_lot on sample (lot);

CREATE INDEX sample_test_by_test on sample_test (test, sample);

CREATE INDEX session_by_account on session (account);

CREATE INDEX setting_by_name on setting (name, id);

CREATE INDEX shelf_life_by_presentation on shelf_life_assignment (presentation, effective_from);

CREATE INDEX signature_by_subject on signature (kind, subject, meaning);

CREATE INDEX specification_by_presentation on specification (presentation);

CREATE INDEX stage_loss_by_sample on stage_loss (sample);

CREATE INDEX step_entry_by_deviation on step_entry (deviation) where deviation is not null;

CREATE INDEX step_entry_by_material_lot on step_entry (material_lot) where material_lot is not null;

CREATE INDEX step_entry_by_record on step_entry (record, step, run);

CREATE INDEX stock_entry_by_lot on stock_entry (lot) where lot is not null;

CREATE INDEX stock_entry_by_material_lot on stock_entry (material_lot);

CREATE INDEX stop_override_by_account on stop_override (account, method_version) where account is not null;

CREATE INDEX stop_override_by_instrument on stop_override (instrument) where instrument is not null;

CREATE INDEX study_amendment_by_study on study_amendment (study);

CREATE INDEX study_by_lot on study (lot);

CREATE INDEX trail_change_update on trail_change (record, row, act) where kind = 'update';

CREATE INDEX trend_equivalence_by_pair on trend_equivalence (kind, one, other);

CREATE INDEX trend_exclusion_by_test on trend_exclusion (sample_test, component);

CREATE INDEX trend_forecast_by_seal on trend_forecast (seal);

CREATE INDEX trend_verdict_by_day on trend_verdict (judged_on, verdict) where rule in ('H', 'A');

CREATE INDEX trend_verdict_by_result on trend_verdict (result);

CREATE TABLE account (
    id integer primary key,
    user_name text not null collate nocase unique,
    full_name text not null,
    kind text not null check (kind in ('person', 'system')),
    identity_verified_by text,              -- who saw proof of identity (11.100)
    password_hash text,                     -- PHC string; null until the person has set one
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE account_code (
    id integer primary key,
    account integer references account (id),   -- null: whoever redeems it becomes the first administrator
    code_digest text not null unique,
    expires_at text not null,
    used_at text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE account_roles (
    id integer primary key,
    account integer not null references account (id),
    roles text not null,                    -- comma-separated codes
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE account_state (
    id integer primary key,
    account integer not null references account (id),
    state text not null check (state in ('enabled', 'disabled')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE arm_stock (
    study_arm integer primary key references study_arm (id),
    containers_left integer not null
) strict;

CREATE TABLE arm_trigger (
    id integer primary key,
    study_arm integer not null references study_arm (id),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE attachment (
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

CREATE TABLE batch_event (
    id integer primary key,
    record integer not null references batch_record (id),
    kind text not null check (kind in ('closed', 'reopened')),
    why text,
    signature integer references signature (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE batch_record (
    id integer primary key,
    uuid blob not null unique,
    number text not null collate nocase unique,
    lot integer not null unique references lot (id),
    content text not null,
    digest text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE blank_sheet (
    id integer primary key,
    number integer not null unique,
    purpose text not null,
    lot integer references lot (id),
    issued_to integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE blank_sheet_event (
    id integer primary key,
    blank_sheet integer not null references blank_sheet (id),
    kind text not null check (kind in ('returned', 'voided', 'transcribed', 'verified')),
    text text not null,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (blank_sheet, kind)
) strict;

CREATE TABLE certificate (
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

CREATE TABLE chamber (
    id integer primary key,
    code text not null collate nocase unique,
    name text not null,
    condition integer not null references condition (id),
    location text not null,
    qualification_due_on text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE completeness_answer (
    id integer primary key,
    lot integer not null references lot (id),
    item integer not null check (item between 1 and 13),
    answer text not null check (answer in ('present', 'not applicable', 'withdrawn')),
    text text not null,                     -- where it stands, or why it does not apply
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE condition (
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

CREATE TABLE container (
    id integer primary key,
    study_arm integer not null references study_arm (id),
    number integer not null,
    label text not null collate nocase unique,
    purpose text not null check (purpose in ('pull', 'spare', 'retain', 'follow-through')),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (study_arm, number)
) strict;

CREATE TABLE container_event (
    id integer primary key,
    container integer not null references container (id),
    kind text not null check (kind in ('pulled', 'broken', 'leaked', 'lost', 'investigation', 'partial pull',
        're-pull', 'destroyed')),
    pull integer references pull (id),
    witness integer references account (id),
    note text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE container_observation (
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

CREATE TABLE counter (
    name text primary key,
    value integer not null
) strict, without rowid;

CREATE TABLE customer (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE deviation (
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

CREATE TABLE deviation_entry (
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

CREATE TABLE draft (
    account integer not null,
    page text not null,
    number integer not null,
    content text not null,
    at text not null,
    primary key (account, page)
) strict, without rowid;

CREATE TABLE equipment (
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

CREATE TABLE equipment_event (
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

CREATE TABLE evaluation_conclusion (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    study_arm integer not null references study_arm (id),   -- any arm of the condition it speaks of
    months integer not null check (months >= 0),            -- proposed; assigned only by the authorised person
    inputs_digest text not null,                            -- SHA-256 of the results and limits it rests on
    content text not null,                                  -- JSON: lots, reasons, answers, inputs, numbers, program
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE evaluation_conclusion_lot (
    id integer primary key,
    conclusion integer not null references evaluation_conclusion (id),
    lot integer not null references lot (id),
    left_out_because text,                                  -- null: chosen
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (conclusion, lot)
) strict;

CREATE TABLE exception_answer (
    id integer primary key,
    sample integer not null references sample (id),
    flag integer references flag (id),
    about text not null,
    answer text not null,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE flag (
    id integer primary key,
    result integer not null references result (id),
    kind text not null,                     -- out of specification, out of trend, not evaluable, spread, single value outside,
                                            -- soft stop, late reading, in-use limit, first value outside
    level text not null check (level in ('exception', 'mark', 'context')),
    sentence text not null,
    numbers text not null,                  -- JSON
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE formulation (
    id integer primary key,
    uuid blob not null unique,
    product integer not null references product (id),
    code text not null collate nocase unique,
    name text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE formulation_version (
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

CREATE TABLE import (
    id integer primary key,
    uuid blob not null unique,
    file_name text not null,
    sha256 text not null unique,
    row_count integer not null,
    result_count integer not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE instrument (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    kind text not null,                     -- pH meter, viscometer, balance, cylinder, thermometer, other
    needs_daily_check integer not null check (needs_daily_check in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE instrument_event (
    id integer primary key,
    instrument integer not null references instrument (id),
    kind text not null check (kind in ('calibrated', 'daily check', 'out of service', 'in service')),
    performed_on text not null,
    due_on text,
    detail text,                            -- JSON: buffers, slope, reference
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE investigation (
    id integer primary key,
    uuid blob not null unique,
    number integer not null unique,
    result integer not null references result (id),
    first_known_at text not null,
    steered_by integer references account (id),
    clock_due_on text,                      -- three working days, where the rule asks it
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE investigation_entry (
    id integer primary key,
    investigation integer not null references investigation (id),
    kind text not null check (kind in ('finding', 'evidence', 'other lot considered', 'steered by', 'conclusion')),
    text text not null,
    other_lot integer references lot (id),
    account integer references account (id),
    signature integer references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE lot (
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

CREATE TABLE lot_decision (
    id integer primary key,
    lot integer not null references lot (id),
    decision text not null check (decision in ('released', 'rejected')),
    decided_on text not null,
    shelf_life_assignment integer references shelf_life_assignment (id),
    expires_on text,
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE lot_distribution (
    id integer primary key,
    lot integer not null references lot (id),
    first_on text not null,
    markets text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE lot_review (
    id integer primary key,
    lot integer not null references lot (id),
    up_to_act integer not null references trail_act (id),
    corrections integer not null,
    digest text not null,                   -- of the corrections, the items and the deviations as they were shown
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE material (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    function text not null,
    density_g_per_ml text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE material_lot (
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

CREATE TABLE material_lot_assay (
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

CREATE TABLE material_lot_status (
    id integer primary key,
    material_lot integer not null references material_lot (id),
    status text not null check (status in ('quarantine', 'released', 'rejected', 'used up')),
    retest_on text,                         -- from now on, where a release follows a retest
    why text not null,
    signature integer references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE method (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    kind text not null,                     -- appearance, redispersibility, ph, viscosity, sedimentation, sediment, numeric
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE method_version (
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

CREATE TABLE open_batch (
    record integer primary key references batch_record (id)
) strict;

CREATE TABLE open_check (
    sample_test integer primary key references sample_test (id)
) strict;

CREATE TABLE open_day (
    stage text not null,
    due_on text not null,
    latest_on text not null,
    pulls integer not null,
    minutes integer not null,
    primary key (stage, due_on, latest_on)
) strict, without rowid;

CREATE TABLE open_due (
    stage text not null,
    due_on text not null,
    pulls integer not null,
    minutes integer not null,
    primary key (stage, due_on)
) strict, without rowid;

CREATE TABLE open_line (
    words text not null,
    -- What changes, in the order in which the lists read it; one text is one column to read.
    state text not null generated always as (
        containers_taken || ' ' || minutes || ' ' || tests || ' ' || started || ' ' || complete || ' ' || checked
        || ' ' || sent_back || ' ' || out_of_specification || ' ' || coalesce(taken_on, '')) stored,
    pull integer primary key references pull (id),
    study_arm integer not null,
    account integer references account (id), -- who has it
    minutes integer not null default 0,     -- at the bench, from the methods of its tests
    taken_on text,                          -- null until it is taken
    containers_taken integer not null default 0,
    tests integer not null default 0,
    started integer not null default 0,
    complete integer not null default 0,
    checked integer not null default 0,
    sent_back integer not null default 0,
    out_of_specification integer not null default 0,
    counted integer not null default 0      -- raised to have the six numbers before it counted again
) strict;

CREATE TABLE open_pull (
    pull integer primary key references pull (id),
    stage text not null check (stage in ('to take', 'in test')),
    due_on text not null,
    latest_on text not null,                -- the last day to take it, then the last day to test it
    minutes integer not null default 0,     -- at the bench, from the methods of its tests
    account integer references account (id) -- who has it
) strict;

CREATE TABLE open_sample (
    sample integer primary key references sample (id)
) strict;

CREATE TABLE packaging_check (
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

CREATE TABLE packaging_entry (
    id integer primary key,
    item integer not null references packaging_item (id),
    kind text not null check (kind in ('issued', 'used', 'sampled', 'destroyed', 'returned')),
    count integer not null check (count >= 0),
    supersedes integer unique references packaging_entry (id),
    why text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE packaging_item (
    id integer primary key,
    lot integer not null references lot (id),
    kind text not null check (kind in ('container', 'closure', 'label', 'carton', 'leaflet', 'other')),
    name text not null,
    material_lot integer references material_lot (id),
    least_percent text not null,            -- accounted for, of what was issued
    most_percent text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE phase_yield (
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

CREATE TABLE phase_yield_check (
    id integer primary key,
    phase_yield integer not null unique references phase_yield (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE photo_mark (
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

CREATE TABLE presentation (
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

CREATE TABLE product (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    dosage_form text not null,
    customer integer references customer (id),
    imported integer references import (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE protocol (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    title text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE protocol_version (
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

CREATE TABLE pull (
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

CREATE TABLE pull_assignment (
    id integer primary key,
    pull integer not null references pull (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE pull_event (
    id integer primary key,
    pull integer not null references pull (id),
    kind text not null check (kind in ('pulled', 'missed', 'cancelled')),
    happened_at text,                       -- when containers left the chamber, if not at the act itself
    happened_on text not null,              -- the site's date of it
    identity_by text,                       -- scan, typed characters
    note text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE qualification (
    id integer primary key,
    account integer not null references account (id),
    method_version integer not null references method_version (id),
    starts_on text not null,
    ends_on text not null,
    reference text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE rack (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    title text not null,
    started_on text not null,               -- time zero of every lot on it
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE rack_lot (
    id integer primary key,
    rack integer not null references rack (id),
    lot integer not null unique references lot (id),
    position integer not null check (position between 1 and 12),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (rack, position)
) strict;

CREATE TABLE reading (
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

CREATE TABLE reading_log (
    id integer primary key,
    account integer not null,
    path text not null,
    at text not null
) strict;

CREATE TABLE record_elsewhere (
    id integer primary key,
    lot integer not null references lot (id),
    reference text not null,
    place text not null,
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE refinery_schema_history(
             version int4 PRIMARY KEY,
             name VARCHAR(255),
             applied_on VARCHAR(255),
             checksum VARCHAR(255));

CREATE TABLE result (
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

CREATE TABLE result_check (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    version integer not null,
    verdict text not null check (verdict in ('checked', 'sent back')),
    why text,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE retain (
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

CREATE TABLE retain_event (
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

CREATE TABLE review_decision (
    id integer primary key,
    sample integer not null references sample (id),
    decision text not null check (decision in ('agree', 'send back', 'not yet')),
    content_digest text not null,
    why text,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE sample (
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

CREATE TABLE sample_test (
    id integer primary key,
    sample integer not null references sample (id),
    position integer not null,
    test text not null,
    title text not null,
    method_version integer not null references method_version (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred,
    unique (sample, test)
) strict;

CREATE TABLE session (
    token_digest text primary key,
    account integer not null references account (id),
    started_at text not null,
    last_seen text not null,
    ended_at text,
    address text,
    agent text
) strict, without rowid;

CREATE TABLE setting (
    id integer primary key,
    name text not null,
    value text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE shelf_life_assignment (
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

CREATE TABLE sign_in_counter (
    key text primary key,
    failures integer not null,
    last_at text not null,
    wait_until text
) strict, without rowid;

CREATE TABLE signature (
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

CREATE TABLE site (
    id integer primary key check (id = 1),
    uuid blob not null,
    name text not null,
    zone text not null,
    is_demo integer not null check (is_demo in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE specification (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE specification_version (
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

CREATE TABLE stage_loss (
    id integer primary key,
    sample integer not null references sample (id),
    container integer references container (id),
    stage text not null check (stage in ('before disturbance', 'redispersion', 'after redispersion')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE step_entry (
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

CREATE TABLE stock_entry (
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

CREATE TABLE stop_override (
    id integer primary key,
    stop text not null check (stop in ('calibration', 'daily check', 'out of service', 'qualification')),
    instrument integer references instrument (id),
    account integer references account (id),
    method_version integer references method_version (id),
    valid_on text not null,
    signature integer not null references signature (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE study (
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

CREATE TABLE study_amendment (
    id integer primary key,
    study integer not null references study (id),
    protocol_version integer not null references protocol_version (id),
    specification_version integer not null references specification_version (id),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE study_arm (
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

CREATE TABLE submission_key (
    key text primary key,
    account integer not null,
    content_digest text not null,
    act integer not null,
    location text,
    at text not null
) strict, without rowid;

CREATE TABLE trail_act (
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

CREATE TABLE trail_change (
    act integer not null references trail_act (id) deferrable initially deferred,
    line integer not null,
    record text not null,                   -- table
    row integer not null,
    kind text not null check (kind in ('insert', 'update')),
    digest blob not null,                   -- of the row after the change
    changes text,                           -- for updates: changed fields, old and new
    primary key (act, line)
) strict, without rowid;

CREATE TABLE trail_seal (
    act integer primary key references trail_act (id) deferrable initially deferred,
    digest blob not null
) strict;

CREATE TABLE trail_subject (
    kind text not null,
    subject integer not null,
    act integer not null,
    primary key (kind, subject, act)
) strict, without rowid;

CREATE TABLE trend_equivalence (
    id integer primary key,
    kind text not null check (kind in ('formulation version', 'method version')),
    one integer not null,
    other integer not null check (other > one),
    state text not null check (state in ('declared', 'withdrawn')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE trend_exclusion (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    component text not null,
    state text not null check (state in ('left out', 'taken back')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE trend_forecast (
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

CREATE TABLE trend_history (
    id integer primary key,
    digest text not null unique,
    content text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE trend_seal (
    id integer primary key,
    pull integer not null unique references pull (id),
    window_opened_on text not null,
    days_late integer not null check (days_late >= 0),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;

CREATE TABLE trend_verdict (
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

CREATE TRIGGER arm_stock_fewer after insert on container_event
when not exists (select 1 from container_event where container = new.container and id <> new.id)
begin
    update arm_stock set containers_left = containers_left - 1
    where study_arm = (select study_arm from container where id = new.container);
end;

CREATE TRIGGER arm_stock_more after insert on container
begin
    insert or ignore into arm_stock (study_arm, containers_left) values (new.study_arm, 0);
    update arm_stock set containers_left = containers_left + 1 where study_arm = new.study_arm;
end;

CREATE TRIGGER guard_approval before insert on signature
when new.meaning = 'approval' and exists (
    select 1 from signature
    where kind = new.kind and subject = new.subject and meaning = 'authorship' and account = new.account)
begin select raise(abort, 'the approver is not an author'); end;

CREATE TRIGGER guard_checker_is_not_reader before insert on result_check
when new.verdict = 'checked' and exists (
    select 1 from reading r join trail_act a on a.id = r.act
    where r.sample_test = new.sample_test and a.account = new.account)
begin select raise(abort, 'the checker is not a reader'); end;

CREATE TRIGGER guard_cleaner_does_not_check before insert on equipment_event
when new.kind = 'checked clean'
    and exists (select 1 from equipment_event where id = new.cleaning and account = new.account)
begin select raise(abort, 'who cleaned does not check'); end;

CREATE TRIGGER guard_closed_deviation before insert on deviation_entry
when exists (select 1 from deviation_entry where deviation = new.deviation and kind = 'closed')
begin select raise(abort, 'the deviation is closed'); end;

CREATE TRIGGER guard_container_leaves_once before insert on container_event
when exists (select 1 from container_event
    where container = new.container and (new.kind <> 'destroyed' or kind = 'destroyed'))
begin select raise(abort, 'the container has left already'); end;

CREATE TRIGGER guard_counter_does_not_check before insert on packaging_check
when exists (select 1 from packaging_entry e join trail_act a on a.id = e.act
    where e.item = new.item and a.account = new.account)
begin select raise(abort, 'who counted does not check'); end;

CREATE TRIGGER guard_follow_through_is_never_opened before insert on container_event
when new.kind in ('pulled', 'partial pull', 're-pull', 'investigation')
    and (select purpose from container where id = new.container) = 'follow-through'
begin select raise(abort, 'a follow-through container is never opened'); end;

CREATE TRIGGER guard_formulation_version before update on formulation_version
when exists (select 1 from signature where kind = 'formulation_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;

CREATE TRIGGER guard_material_status_is_signed before insert on material_lot_status
when new.signature is null and exists (select 1 from material_lot_status where material_lot = new.material_lot)
begin select raise(abort, 'a later status of a material lot is signed'); end;

CREATE TRIGGER guard_method_version before update on method_version
when exists (select 1 from signature where kind = 'method_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;

CREATE TRIGGER guard_only_follow_through_is_observed before insert on container_observation
when (select purpose from container where id = new.container) <> 'follow-through'
begin select raise(abort, 'only a follow-through container is observed'); end;

CREATE TRIGGER guard_protocol_version before update on protocol_version
when exists (select 1 from signature where kind = 'protocol_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;

CREATE TRIGGER guard_reviewer_is_not_performer before insert on signature
when new.kind = 'sample' and new.meaning = 'review' and (exists (
    select 1 from reading r join sample_test t on t.id = r.sample_test join trail_act a on a.id = r.act
    where t.sample = new.subject and a.account = new.account) or exists (
    select 1 from result_check c join sample_test t on t.id = c.sample_test
    where t.sample = new.subject and c.account = new.account and c.verdict = 'checked'))
begin select raise(abort, 'the reviewer is not a performer'); end;

CREATE TRIGGER guard_signature_system before insert on signature
when (select kind from account where id = new.account) <> 'person'
begin select raise(abort, 'a system account cannot sign'); end;

CREATE TRIGGER guard_specification_version before update on specification_version
when exists (select 1 from signature where kind = 'specification_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;

CREATE TRIGGER guard_step_checker_is_not_doer before insert on step_entry
when new.kind in ('checked', 'second weighing') and exists (
    select 1 from step_entry
    where record = new.record and step = new.step and run = new.run and account = new.account
        and kind in ('started', 'weighing', 'value', 'stopped', 'resumed', 'ended'))
begin select raise(abort, 'the checker is a doer of the step'); end;

CREATE TRIGGER guard_step_doer_is_not_checker before insert on step_entry
when new.kind in ('started', 'weighing', 'value', 'stopped', 'resumed', 'ended') and exists (
    select 1 from step_entry
    where record = new.record and step = new.step and run = new.run and account = new.account
        and kind in ('checked', 'second weighing'))
begin select raise(abort, 'the doer is a checker of the step'); end;

CREATE TRIGGER guard_step_of_closed_record before insert on step_entry
when (select kind from batch_event where record = new.record order by id desc limit 1) = 'closed'
begin select raise(abort, 'the record is closed'); end;

CREATE TRIGGER guard_stock_direction before insert on stock_entry
when (new.kind in ('received', 'returned') and cast(new.quantity as real) <= 0)
    or (new.kind in ('dispensed', 'destroyed') and cast(new.quantity as real) >= 0)
begin select raise(abort, 'what comes in is more than zero, what goes out less'); end;

CREATE TRIGGER guard_stock_follows before insert on stock_entry
when not sums_to(coalesce((select balance from stock_entry where material_lot = new.material_lot
    order by id desc limit 1), '0'), new.quantity, new.balance)
begin select raise(abort, 'the balance does not follow from the one before'); end;

CREATE TRIGGER guard_stock_not_below_zero before insert on stock_entry
when cast(new.balance as real) < 0
begin select raise(abort, 'a material lot never holds less than nothing'); end;

CREATE TRIGGER guard_trail_act_delete before delete on trail_act
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_trail_act_update before update on trail_act
when old.id is not current_act() or old.detail is not null
    or exists (select 1 from trail_seal where act = old.id)
    or (new.id, new.at, new.offset_minutes, new.zone, new.account, new.user_name, new.full_name, new.role, new.act,
        new.reason, new.session, new.address, new.outcome)
    is not (old.id, old.at, old.offset_minutes, old.zone, old.account, old.user_name, old.full_name, old.role, old.act,
        old.reason, old.session, old.address, old.outcome)
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_trail_change_delete before delete on trail_change
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_trail_change_update before update on trail_change
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_trail_seal_delete before delete on trail_seal
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_trail_seal_update before update on trail_seal
begin select raise(abort, 'the trail is never changed'); end;

CREATE TRIGGER guard_transcriber_does_not_verify before insert on blank_sheet_event
when new.kind = 'verified' and exists (select 1 from blank_sheet_event
    where blank_sheet = new.blank_sheet and kind = 'transcribed' and account = new.account)
begin select raise(abort, 'who transcribed does not verify'); end;

CREATE TRIGGER guard_yield_checker_is_another before insert on phase_yield_check
when exists (select 1 from phase_yield where id = new.phase_yield and account = new.account)
begin select raise(abort, 'who worked out the yield does not check it'); end;

CREATE TRIGGER guard_yield_of_closed_record before insert on phase_yield
when (select kind from batch_event where record = new.record order by id desc limit 1) = 'closed'
begin select raise(abort, 'the record is closed'); end;

CREATE TRIGGER open_batch_closed after insert on batch_event
when new.kind = 'closed'
begin
    delete from open_batch where record = new.record;
end;

CREATE TRIGGER open_batch_decided after insert on lot_decision
begin
    delete from open_batch where record = (select id from batch_record where lot = new.lot);
end;

CREATE TRIGGER open_batch_reopened after insert on batch_event
when new.kind = 'reopened'
begin
    insert or ignore into open_batch (record) values (new.record);
end;

CREATE TRIGGER open_batch_started after insert on batch_record
begin
    insert or ignore into open_batch (record) values (new.id);
end;

CREATE TRIGGER open_check_answered after insert on result_check
begin
    delete from open_check where sample_test = new.sample_test;
end;

CREATE TRIGGER open_check_asked after insert on result
when new.imported is null and (select json_extract(v.content, '$.needs_check')
    from sample_test t join method_version v on v.id = t.method_version where t.id = new.sample_test) = 1
begin
    insert or ignore into open_check (sample_test) values (new.sample_test);
end;

CREATE TRIGGER open_day_fewer after delete on open_pull
begin
    update open_day set pulls = pulls - 1, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on;
    delete from open_day
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on and pulls = 0;
end;

CREATE TRIGGER open_day_more after insert on open_pull
begin
    insert or ignore into open_day (stage, due_on, latest_on, pulls, minutes)
    values (new.stage, new.due_on, new.latest_on, 0, 0);
    update open_day set pulls = pulls + 1, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on and latest_on = new.latest_on;
end;

CREATE TRIGGER open_day_moved after update of stage, due_on, latest_on, minutes on open_pull
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

CREATE TRIGGER open_due_fewer after delete on open_day
begin
    update open_due set pulls = pulls - old.pulls, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on;
    delete from open_due where stage = old.stage and due_on = old.due_on and pulls = 0;
end;

CREATE TRIGGER open_due_more after insert on open_day
begin
    insert or ignore into open_due (stage, due_on, pulls, minutes) values (new.stage, new.due_on, 0, 0);
    update open_due set pulls = pulls + new.pulls, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on;
end;

CREATE TRIGGER open_due_moved after update of pulls, minutes on open_day
begin
    update open_due set pulls = pulls + new.pulls - old.pulls, minutes = minutes + new.minutes - old.minutes
    where stage = new.stage and due_on = new.due_on;
end;

CREATE TRIGGER open_line_asked after insert on sample_test
begin
    update open_line set tests = tests + 1
    where pull = (select pull from sample where id = new.sample);
end;

CREATE TRIGGER open_line_checked after insert on result_check
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test);
end;

CREATE TRIGGER open_line_closed after delete on open_pull
begin
    delete from open_line where pull = old.pull;
end;

CREATE TRIGGER open_line_counted after update of counted on open_line
begin
    update open_line
    set (tests, started, complete, checked, sent_back, out_of_specification) = (
        select w.tests, w.started, w.complete, w.checked,
            max(w.sent_back, coalesce((select decision = 'send back' and act > w.newest
                from review_decision where sample = w.sample order by id desc limit 1), 0)),
            w.out_of_specification
        from pull_progress w
        where w.pull = new.pull)
    where pull = new.pull;
end;

CREATE TRIGGER open_line_given after update of account, minutes on open_pull
begin
    update open_line set account = new.account, minutes = new.minutes where pull = new.pull;
end;

CREATE TRIGGER open_line_happened after insert on pull_event
begin
    update open_line set taken_on = new.happened_on where pull = new.pull and new.kind = 'pulled';
end;

CREATE TRIGGER open_line_judged after insert on result
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test);
end;

CREATE TRIGGER open_line_opened after insert on open_pull
begin
    insert into open_line (pull, study_arm, words, account, minutes, taken_on, containers_taken, tests)
    select p.id, p.study_arm, w.words, o.account, o.minutes,
        (select happened_on from pull_event where pull = p.id and kind = 'pulled' order by id desc limit 1),
        (select count(*) from container_event where pull = p.id),
        (select count(*) from sample_test t join sample s on s.id = t.sample where s.pull = p.id)
    from open_pull o
    join pull p on p.id = o.pull
    join pull_words w on w.pull = p.id
    where o.pull = new.pull;
    update open_line set counted = counted + 1 where pull = new.pull and taken_on is not null;
end;

CREATE TRIGGER open_line_read after insert on reading
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test)
        and (sent_back > 0
            or not exists (select 1 from reading where sample_test = new.sample_test and id < new.id));
end;

CREATE TRIGGER open_line_reviewed after insert on review_decision
begin
    update open_line set counted = counted + 1
    where pull = (select pull from sample where id = new.sample);
end;

CREATE TRIGGER open_line_sampled after insert on sample
when new.pull is not null
begin
    insert into open_line (pull, study_arm, words, account, minutes)
    select p.id, p.study_arm, w.words, o.account, o.minutes
    from open_pull o
    join pull p on p.id = o.pull
    join pull_words w on w.pull = p.id
    where o.pull = new.pull;
end;

CREATE TRIGGER open_line_taken after insert on container_event
when new.pull is not null
begin
    update open_line set containers_taken = containers_taken + 1 where pull = new.pull;
end;

CREATE TRIGGER open_pull_asked after insert on sample_test
begin
    update open_pull
    set minutes = minutes + coalesce((select json_extract(content, '$.hands_on_minutes')
        from method_version where id = new.method_version), 0)
    where pull = (select pull from sample where id = new.sample);
end;

CREATE TRIGGER open_pull_assigned after insert on pull_assignment
begin
    update open_pull set account = new.account where pull = new.pull;
end;

CREATE TRIGGER open_pull_happened after insert on pull_event
begin
    delete from open_pull where pull = new.pull and new.kind <> 'pulled';
    update open_pull set stage = 'in test', latest_on = date(new.happened_on,
        (select coalesce(test_within_days, 0) || ' days' from pull where id = new.pull))
    where pull = new.pull;
end;

CREATE TRIGGER open_pull_planned after insert on pull
when new.imported is null and new.due_on is not null
begin
    insert into open_pull (pull, stage, due_on, latest_on)
    values (new.id, 'to take', new.due_on, coalesce(new.latest_on, new.due_on));
end;

CREATE TRIGGER open_pull_sent_back after insert on result_check
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

CREATE TRIGGER open_pull_tested after insert on result
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

CREATE TRIGGER open_sample_answer after insert on exception_answer
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;

CREATE TRIGGER open_sample_check after insert on result_check
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;

CREATE TRIGGER open_sample_loss after insert on stage_loss
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;

CREATE TRIGGER open_sample_pulled after insert on pull_event
when new.kind = 'pulled'
begin
    insert or ignore into open_sample (sample)
    select s.id from pull p join sample s on s.pull = p.id where p.id = new.pull and p.imported is null;
end;

CREATE TRIGGER open_sample_reading after insert on reading
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;

CREATE TRIGGER open_sample_received after insert on sample
when new.pull is null
begin
    insert or ignore into open_sample (sample) values (new.id);
end;

CREATE TRIGGER open_sample_result after insert on result
when new.imported is null
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;

CREATE TRIGGER open_sample_signed after insert on signature
when new.kind = 'sample' and new.meaning = 'review'
begin
    delete from open_sample where sample = new.subject;
end;

CREATE VIEW pull_progress as
select pull, sample, count(*) as tests, sum(started) as started,
    sum(version is not null and coalesce(checking, '') <> 'sent back') as complete,
    sum(version is not null and (coalesce(checking, '') = 'checked' or (checking is null and needs_check = 0)))
        as checked,
    sum(coalesce(checking, '') = 'sent back') as sent_back, sum(is_out) as out_of_specification,
    max(newest) as newest
from pull_test
group by pull, sample;

CREATE VIEW pull_test as
select q.*,
    (select verdict from result_check where sample_test = q.sample_test and version = q.version
     order by id desc limit 1) as checking,
    exists (select 1 from result where sample_test = q.sample_test and version = q.version
        and verdict = 'out of specification') as is_out
from (
    select s.pull as pull, s.id as sample, t.id as sample_test,
        json_extract(v.content, '$.needs_check') as needs_check,
        (select max(version) from result where sample_test = t.id) as version,
        exists (select 1 from reading where sample_test = t.id) as started,
        max(coalesce((select max(act) from result where sample_test = t.id), 0),
            coalesce((select max(act) from reading where sample_test = t.id), 0)) as newest
    from sample s
    cross join sample_test t on t.sample = s.id
    cross join method_version v on v.id = t.method_version
    where s.pull is not null) q;

CREATE VIEW pull_words as
select p.id as pull,
    replace(l.number, char(31), ' ') || char(31) || replace(d.name || ', ' || n.pack, char(31), ' ') || char(31)
        || replace(n.container_word, char(31), ' ') || char(31) || y.number || char(31)
        || replace(c.name, char(31), ' ') || ', ' || a.orientation || char(31)
        || replace(coalesce(h.code, ''), char(31), ' ') || char(31) || p.age_text || char(31)
        || s.number || char(31) || lower(hex(p.uuid)) || char(31)
        || p.due_on || char(31) || coalesce(p.earliest_on, '') || char(31) || coalesce(p.latest_on, '') || char(31)
        || p.containers_needed || char(31) || p.id || char(31) || y.id || char(31)
        || coalesce(p.test_within_days, '') as words
from pull p
cross join study_arm a on a.id = p.study_arm
join condition c on c.id = a.condition
left join chamber h on h.id = a.chamber
join study y on y.id = a.study
join lot l on l.id = y.lot
join presentation n on n.id = l.presentation
join product d on d.id = n.product
join sample s on s.pull = p.id;
