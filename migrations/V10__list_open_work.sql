-- What the lists of work show of an open pull, in one row, so that a page of fifty pulls reads fifty rows and not the
-- thousands they are made of. Derived from the rows of earlier migrations, kept by triggers, not itself a record.

-- How many containers of an arm still stand in their chamber.
create table arm_stock (
    study_arm integer primary key references study_arm (id),
    containers_left integer not null
) strict;
insert into arm_stock (study_arm, containers_left)
select k.study_arm, sum(not exists (select 1 from container_event where container = k.id))
from container k
group by k.study_arm;
create trigger arm_stock_more after insert on container
begin
    insert or ignore into arm_stock (study_arm, containers_left) values (new.study_arm, 0);
    update arm_stock set containers_left = containers_left + 1 where study_arm = new.study_arm;
end;
create trigger arm_stock_fewer after insert on container_event
when not exists (select 1 from container_event where container = new.container and id <> new.id)
begin
    update arm_stock set containers_left = containers_left - 1
    where study_arm = (select study_arm from container where id = new.container);
end;

-- What a list says of a pull as it was planned, in one text: parts with a unit separator between them, in the order in
-- which the lists read them. Nothing of it changes once the pull is planned.
create view pull_words as
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

-- How far each test of a pull is, and how far they are together. A test counts as checked when its newest result is, or
-- when its method asks for no check.
create view pull_test as
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
create view pull_progress as
select pull, sample, count(*) as tests, sum(started) as started,
    sum(version is not null and coalesce(checking, '') <> 'sent back') as complete,
    sum(version is not null and (coalesce(checking, '') = 'checked' or (checking is null and needs_check = 0)))
        as checked,
    sum(coalesce(checking, '') = 'sent back') as sent_back, sum(is_out) as out_of_specification,
    max(newest) as newest
from pull_test
group by pull, sample;

create table open_line (
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

create trigger open_line_counted after update of counted on open_line
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
create trigger open_line_opened after insert on open_pull
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
create trigger open_line_given after update of account, minutes on open_pull
begin
    update open_line set account = new.account, minutes = new.minutes where pull = new.pull;
end;
create trigger open_line_closed after delete on open_pull
begin
    delete from open_line where pull = old.pull;
end;
create trigger open_line_sampled after insert on sample
when new.pull is not null
begin
    insert into open_line (pull, study_arm, words, account, minutes)
    select p.id, p.study_arm, w.words, o.account, o.minutes
    from open_pull o
    join pull p on p.id = o.pull
    join pull_words w on w.pull = p.id
    where o.pull = new.pull;
end;
create trigger open_line_asked after insert on sample_test
begin
    update open_line set tests = tests + 1
    where pull = (select pull from sample where id = new.sample);
end;
create trigger open_line_happened after insert on pull_event
begin
    update open_line set taken_on = new.happened_on where pull = new.pull and new.kind = 'pulled';
end;
create trigger open_line_taken after insert on container_event
when new.pull is not null
begin
    update open_line set containers_taken = containers_taken + 1 where pull = new.pull;
end;
create trigger open_line_read after insert on reading
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test)
        and (sent_back > 0
            or not exists (select 1 from reading where sample_test = new.sample_test and id < new.id));
end;
create trigger open_line_judged after insert on result
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test);
end;
create trigger open_line_checked after insert on result_check
begin
    update open_line set counted = counted + 1
    where pull = (select s.pull from sample_test t join sample s on s.id = t.sample where t.id = new.sample_test);
end;
create trigger open_line_reviewed after insert on review_decision
begin
    update open_line set counted = counted + 1
    where pull = (select pull from sample where id = new.sample);
end;

insert into open_line (pull, study_arm, words, account, minutes, taken_on, containers_taken, tests)
select p.id, p.study_arm, w.words, o.account, o.minutes,
    (select happened_on from pull_event where pull = p.id and kind = 'pulled' order by id desc limit 1),
    (select count(*) from container_event where pull = p.id),
    (select count(*) from sample_test t join sample s on s.id = t.sample where s.pull = p.id)
from open_pull o
join pull p on p.id = o.pull
join pull_words w on w.pull = p.id;
update open_line set counted = 1 where taken_on is not null;

-- The sums of open_day by due date alone: the weeks ahead and their count.
create table open_due (
    stage text not null,
    due_on text not null,
    pulls integer not null,
    minutes integer not null,
    primary key (stage, due_on)
) strict, without rowid;
insert into open_due (stage, due_on, pulls, minutes)
select stage, due_on, sum(pulls), sum(minutes) from open_day group by stage, due_on;
create trigger open_due_more after insert on open_day
begin
    insert or ignore into open_due (stage, due_on, pulls, minutes) values (new.stage, new.due_on, 0, 0);
    update open_due set pulls = pulls + new.pulls, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on;
end;
create trigger open_due_moved after update of pulls, minutes on open_day
begin
    update open_due set pulls = pulls + new.pulls - old.pulls, minutes = minutes + new.minutes - old.minutes
    where stage = new.stage and due_on = new.due_on;
end;
create trigger open_due_fewer after delete on open_day
begin
    update open_due set pulls = pulls - old.pulls, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on;
    delete from open_due where stage = old.stage and due_on = old.due_on and pulls = 0;
end;

-- What is late or closes is few days by the last day, and many by the due date.
create index open_day_by_latest on open_day (stage, latest_on, due_on, pulls);

-- The week goes by due dates.
drop index open_pull_by_due;
create index open_pull_by_due on open_pull (stage, due_on, pull, latest_on);
