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

-- The words and dates of a pull, as planned and as it stands.
create view pull_line as
select p.id as pull, s.id as sample, s.number as number, y.id as study, y.number as study_number,
    a.id as study_arm, a.position as arm_position, l.id as lot, l.number as lot_number,
    d.name || ', ' || n.pack as product_words, n.container_word as container_word, c.name as condition_name,
    a.orientation as orientation, h.code as chamber_code, h.location as chamber_location,
    p.age_text as age_text, p.test_within_days as test_within_days, e.kind as event,
    e.happened_on as happened_on, y.started_on as started_on, p.due_on as due_on,
    p.earliest_on as earliest_on, p.latest_on as latest_on, p.is_last as is_last,
    p.containers_needed as containers_needed, p.uuid as uuid,
    (select count(*) from container_event where pull = p.id) as containers_taken,
    (select count(*) from sample_test where sample = s.id) as tests
from pull p
cross join study_arm a on a.id = p.study_arm
join condition c on c.id = a.condition
left join chamber h on h.id = a.chamber
join study y on y.id = a.study
join lot l on l.id = y.lot
join presentation n on n.id = l.presentation
join product d on d.id = n.product
join sample s on s.pull = p.id
left join pull_event e on e.id = (select max(id) from pull_event where pull = p.id);

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
    pull integer primary key references pull (id),
    sample integer not null,
    number text not null,
    study integer not null,
    study_number text not null,
    study_arm integer not null,
    arm_position integer not null,
    lot integer not null,
    lot_number text not null,
    product_words text not null,
    container_word text not null,
    condition_name text not null,
    orientation text not null,
    chamber_code text,
    chamber_location text,
    age_text text not null,
    test_within_days integer,
    event text,
    happened_on text,
    started_on text not null,
    due_on text not null,
    earliest_on text,
    latest_on text,
    is_last integer not null,
    containers_needed integer not null,
    uuid blob not null,
    containers_taken integer not null,
    tests integer not null,
    started integer not null default 0,
    complete integer not null default 0,
    checked integer not null default 0,
    sent_back integer not null default 0,
    out_of_specification integer not null default 0,
    counted integer not null default 0      -- raised to have the five numbers before it counted again
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
    insert into open_line
    select *, 0, 0, 0, 0, 0, 0 from pull_line where pull = new.pull;
    update open_line set counted = counted + 1 where pull = new.pull and event = 'pulled';
end;
create trigger open_line_closed after delete on open_pull
begin
    delete from open_line where pull = old.pull;
end;
create trigger open_line_sampled after insert on sample
when new.pull is not null
begin
    insert into open_line
    select *, 0, 0, 0, 0, 0, 0 from pull_line
    where pull = new.pull and exists (select 1 from open_pull where pull = new.pull);
end;
create trigger open_line_asked after insert on sample_test
begin
    update open_line set tests = tests + 1
    where pull = (select pull from sample where id = new.sample);
end;
create trigger open_line_happened after insert on pull_event
begin
    update open_line set event = new.kind, happened_on = new.happened_on where pull = new.pull;
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

insert into open_line
select *, 0, 0, 0, 0, 0, 0 from pull_line where pull in (select pull from open_pull);
update open_line set counted = 1 where event = 'pulled';

-- The week goes by due dates.
drop index open_pull_by_due;
create index open_pull_by_due on open_pull (stage, due_on, pull, latest_on);
