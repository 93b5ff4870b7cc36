-- A data folder as the program left it at migration V04: invented people, a released lot, a corrected reading,
-- an open investigation, a running study. Never touched: newer programs must open it and find that all holds.
PRAGMA foreign_keys=OFF;
BEGIN TRANSACTION;
CREATE TABLE refinery_schema_history(
             version int4 PRIMARY KEY,
             name VARCHAR(255),
             applied_on VARCHAR(255),
             checksum VARCHAR(255));
INSERT INTO refinery_schema_history VALUES(1,'people_and_trail','2026-12-01T16:19:19.029697862Z','279453224228533756');
INSERT INTO refinery_schema_history VALUES(2,'definitions','2026-12-01T16:19:19.029720316Z','7283960895136277543');
INSERT INTO refinery_schema_history VALUES(3,'lots_and_studies','2026-12-01T16:19:19.02972284Z','7546601234588984641');
INSERT INTO refinery_schema_history VALUES(4,'bench_and_review','2026-12-01T16:19:19.029724793Z','16977527130141639809');
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
INSERT INTO trail_act VALUES(1,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'ChangeSchema','V01 people_and_trail, V02 definitions, V03 lots_and_studies, V04 bench_and_review',NULL,NULL,NULL,'done');
INSERT INTO trail_act VALUES(2,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'SetUpSite','Tarnwick Suspension Works, zone Europe/London',NULL,NULL,NULL,'done');
INSERT INTO trail_act VALUES(3,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'AddCondition','the catalogue of 9 conditions of the published guidelines',NULL,NULL,NULL,'done');
INSERT INTO trail_act VALUES(4,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Nell Farrow (nell.farrow): administrator','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(5,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Tomas Reyle (tomas.reyle): formulator','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(6,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Bea Skelton (bea.skelton): production operator','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(7,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Rafe Tolland (rafe.tolland): analyst','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(8,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Ilse Brandt (ilse.brandt): analyst','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(9,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Maren Oddy (maren.oddy): lab manager','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(10,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Otis Vane (otis.vane): lab manager','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(11,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Ada Whitlock (ada.whitlock): QA reviewer','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(12,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Per Lindqvist (per.lindqvist): QA reviewer','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(13,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Ines Caro (ines.caro): auditor','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(14,'2026-12-01T09:00:00.000Z',0,'Europe/London',1,'console','The console',NULL,'CreateAccount','Lena Marsh (lena.marsh): formulator','invented person of the demo',NULL,NULL,'done');
INSERT INTO trail_act VALUES(15,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddProduct','TW, Antacid oral suspension, oral suspension',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(16,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddPresentation','TW-104 of TW: 400 mg/5 mL, 200 mL amber PET bottle',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(17,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','AddFormulation','F-1, Xanthan and cellulose of TW',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(18,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','AddMaterial','M-1-1, magnesium hydroxide (active)',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(19,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','AddMaterial','M-1-2, xanthan gum (suspending agent)',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(20,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','AddMaterial','M-1-3, purified water (vehicle)',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(21,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','DraftFormulationVersion','version 1','first version of the recipe','storysto',NULL,'done');
INSERT INTO trail_act VALUES(22,'2026-12-01T09:00:00.000Z',0,'Europe/London',4,'tomas.reyle','Tomas Reyle','formulator','SignFormulationVersion','version 1, as its author',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(23,'2026-12-01T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','SignFormulationVersion','version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(24,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddMethod','AS-01, Assay (numeric test)',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(25,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftMethodVersion','version 1, as its author',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(26,'2026-12-01T09:00:00.000Z',0,'Europe/London',9,'otis.vane','Otis Vane','lab manager','ApproveMethodVersion','version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(27,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddMethod','DE-01, Density (numeric test)',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(28,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftMethodVersion','version 1, as its author',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(29,'2026-12-01T09:00:00.000Z',0,'Europe/London',9,'otis.vane','Otis Vane','lab manager','ApproveMethodVersion','version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(30,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftSpecificationVersion','SP-104, version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(31,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftSpecificationVersion','version 1, as its author',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(32,'2026-12-01T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','ApproveSpecificationVersion','version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(33,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','QualifyPerson','Rafe Tolland for AS-01 version 1, 1 Jan 2026 to 5 Dec 2029',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(34,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','QualifyPerson','Rafe Tolland for DE-01 version 1, 1 Jan 2026 to 5 Dec 2029',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(35,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','QualifyPerson','Ilse Brandt for AS-01 version 1, 1 Jan 2026 to 5 Dec 2029',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(36,'2026-12-01T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','QualifyPerson','Ilse Brandt for DE-01 version 1, 1 Jan 2026 to 5 Dec 2029',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(37,'2026-12-01T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','AssignShelfLife','TW-104, United Kingdom: 24 months, Do not store above 25 °C, tentative, from 1 Dec 2026','protocol PR-104 and report RP-7','storysto',NULL,'done');
INSERT INTO trail_act VALUES(38,'2026-12-03T09:00:00.000Z',0,'Europe/London',5,'bea.skelton','Bea Skelton','production operator','MakeLot','TW-104-0640, made on 2 Dec 2026',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(39,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','ReceiveSample','TW-104-0640-R1, release: 2 tests',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(40,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-R1, Assay · reading 1: 99.6',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(41,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-R1, Assay · reading 2: 100.2',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(42,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','CompleteTest','TW-104-0640-R1, Assay: version 1, 99.9 conforms',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(43,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-R1, Density · reading 1: 1.11',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(44,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-R1, Density · reading 2: 1.12',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(45,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','CompleteTest','TW-104-0640-R1, Density: version 1, 1.12 conforms',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(46,'2026-12-03T09:00:00.000Z',0,'Europe/London',7,'ilse.brandt','Ilse Brandt','analyst','SignIn',NULL,NULL,'203d35c0',NULL,'done');
INSERT INTO trail_act VALUES(47,'2026-12-03T09:00:00.000Z',0,'Europe/London',7,'ilse.brandt','Ilse Brandt','analyst','CheckResult','TW-104-0640-R1: Assay, version 1',NULL,'203d35c0',NULL,'done');
INSERT INTO trail_act VALUES(48,'2026-12-03T09:00:00.000Z',0,'Europe/London',7,'ilse.brandt','Ilse Brandt','analyst','CheckResult','TW-104-0640-R1: Density, version 1',NULL,'203d35c0',NULL,'done');
INSERT INTO trail_act VALUES(49,'2026-12-03T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','SignIn',NULL,NULL,'70ede8cb',NULL,'done');
INSERT INTO trail_act VALUES(50,'2026-12-03T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','DecideReview','TW-104-0640-R1: agreed, not signed yet',NULL,'70ede8cb',NULL,'done');
INSERT INTO trail_act VALUES(51,'2026-12-03T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','SignPulls','TW-104-0640-R1',NULL,'70ede8cb',NULL,'done');
INSERT INTO trail_act VALUES(52,'2026-12-03T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','DecideLot','TW-104-0640 released, use by 30 Nov 2028',NULL,'70ede8cb',NULL,'done');
INSERT INTO trail_act VALUES(53,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','ReceiveSample','TW-104-0640-T1, retain check: 1 test',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(54,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-T1, Assay · reading 1: 107.6',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(55,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','TW-104-0640-T1, Assay · reading 2: 108.2',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(56,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','CompleteTest','TW-104-0640-T1, Assay: version 1, 107.9 out of specification; investigation 1 opened',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(57,'2026-12-03T09:00:00.000Z',0,'Europe/London',7,'ilse.brandt','Ilse Brandt','analyst','CheckResult','TW-104-0640-T1: Assay, version 1',NULL,'203d35c0',NULL,'done');
INSERT INTO trail_act VALUES(58,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-25/60 at 25 °C/60 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(59,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-30/65 at 30 °C/65 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(60,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-40/75 at 40 °C/75 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(61,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-25/40 at 25 °C/40 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(62,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-30/35 at 30 °C/35 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(63,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-40/25 at 40 °C/at most 25 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(64,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-5 at 5 °C',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(65,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH--20 at −20 °C',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(66,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','AddChamber','CH-30/75 at 30 °C/75 % RH',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(67,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftProtocolVersion','SP-104 with version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(68,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftProtocolVersion','version 1','first version','storysto',NULL,'done');
INSERT INTO trail_act VALUES(69,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','DraftProtocolVersion','version 1, as its author',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(70,'2026-12-03T09:00:00.000Z',0,'Europe/London',10,'ada.whitlock','Ada Whitlock','QA reviewer','ApproveProtocolVersion','version 1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(71,'2026-12-03T09:00:00.000Z',0,'Europe/London',8,'maren.oddy','Maren Oddy','lab manager','StartStudy','ST-001 of lot TW-104-0640: 1 arms, 7 containers.',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(72,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordPull','ST-001-P01, Initial: 1 of 1 containers on 3 Dec 2026','taken for this story','storysto',NULL,'done');
INSERT INTO trail_act VALUES(73,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','ST-001-P01, Assay · reading 1: 99.1',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(74,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','RecordReadings','ST-001-P01, Assay · reading 2: 99.6',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(75,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','CompleteTest','ST-001-P01, Assay: version 1, 99.4 conforms',NULL,'storysto',NULL,'done');
INSERT INTO trail_act VALUES(76,'2026-12-03T09:00:00.000Z',0,'Europe/London',6,'rafe.tolland','Rafe Tolland','analyst','CorrectReading','ST-001-P01 · Assay, reading 1: was 99.1, is 99.4','mistyped','storysto',NULL,'done');
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
INSERT INTO trail_change VALUES(1,1,'account',1,'insert',X'4a3579186575c65cb2ec5ed0e3f1c77948df9c53eb5d1913bde1bca2d170dc86',NULL);
INSERT INTO trail_change VALUES(1,2,'account',2,'insert',X'd1927207d17265d929d45f117ddc683e9e55fbedc005b2562786ecfef91df0b6',NULL);
INSERT INTO trail_change VALUES(2,1,'site',1,'insert',X'e4f9b95be6b12b263ae475669e8aa877350f1c344cb50c97ee9303fcfb5ea28c',NULL);
INSERT INTO trail_change VALUES(3,1,'condition',1,'insert',X'01526ab2bcdbb0b88945eca3952193b8c5cf092a2e6b8f70949fffb974a36b17',NULL);
INSERT INTO trail_change VALUES(3,2,'condition',2,'insert',X'afc98133c07ad0db00257253836a6c6510cf8a40a126cde6ed48f28a89710f73',NULL);
INSERT INTO trail_change VALUES(3,3,'condition',3,'insert',X'454e5718d38d62c05088bf651b0b0524852dd3729e3724cd21892840154e2ed9',NULL);
INSERT INTO trail_change VALUES(3,4,'condition',4,'insert',X'b34a38e0df836ad35fa158c553f0c9aeb0353d67a9bc65d9ebce17276d40e93e',NULL);
INSERT INTO trail_change VALUES(3,5,'condition',5,'insert',X'12dfaff521f968913c933150f56a6ae272e5c8dcdef9784fded24f3aa8c65d17',NULL);
INSERT INTO trail_change VALUES(3,6,'condition',6,'insert',X'd2153c8ea21f667996e86a9234875bbe37c21fbf8f9dfa80145e16f60b57add2',NULL);
INSERT INTO trail_change VALUES(3,7,'condition',7,'insert',X'7c5aa63ff6356573ceecef660c006f2548321a0419bd6d45a9fbb65d759bd717',NULL);
INSERT INTO trail_change VALUES(3,8,'condition',8,'insert',X'9560c5bcbea3c0fb00dee24a1ac170ffc647143db172a14d351608e2efb82237',NULL);
INSERT INTO trail_change VALUES(3,9,'condition',9,'insert',X'6e97799f9ec2b455b267bdd88f8c1a18229a594dc40954c1cdec851eaf6e53a7',NULL);
INSERT INTO trail_change VALUES(4,1,'account',3,'insert',X'de72bc82b1c32b9635cbaf76a4d76f4b686731790cfbfd93a968d4d9fdc30bd8',NULL);
INSERT INTO trail_change VALUES(4,2,'account_roles',1,'insert',X'490971aaefd9a6074520076c0510e8ad18df57e8238f142b10d39a98cbc91f60',NULL);
INSERT INTO trail_change VALUES(4,3,'account',3,'update',X'07508dbcbc283349ef6248003055727f8aa6e76e72836fa578cb3b5853dd14fe','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(5,1,'account',4,'insert',X'a2f769237a2779cb981aa670c4644678096930c54e5e79d22683863a6c5bbd4b',NULL);
INSERT INTO trail_change VALUES(5,2,'account_roles',2,'insert',X'f4cab416f9dca30d026944eb98091da2468a8944668ee0a8f658b0ea5596b669',NULL);
INSERT INTO trail_change VALUES(5,3,'account',4,'update',X'295aa5782915dedf7ef047af8ecd498952fbf331740b3bd52b30f33275016987','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(6,1,'account',5,'insert',X'4753d54797c731e2901fc0dbe99852cea9d4cfdb104d4268fde5cb9bb1738760',NULL);
INSERT INTO trail_change VALUES(6,2,'account_roles',3,'insert',X'a8f9af5c6d0bf9cf246f8339e593da9e9fc80ab34ac5a8345096776d507973f6',NULL);
INSERT INTO trail_change VALUES(6,3,'account',5,'update',X'4c2d319a6606d1f8b02ac9ebb8418e2f4d5a19b9eb1bf3c782a09e29df40d7cd','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(7,1,'account',6,'insert',X'f9ded454d89fcf6197958f4acd0f55858984ff5fb4c1933de0af8d7f3e921093',NULL);
INSERT INTO trail_change VALUES(7,2,'account_roles',4,'insert',X'1b5c95a5d42c85614b5122b392f93ed4483373b6ed589581289022672c321e2c',NULL);
INSERT INTO trail_change VALUES(7,3,'account',6,'update',X'47374dad8a3f11ad34f8f9119a01ac5fc79fe185407adc5da192dd4354ace24e','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(8,1,'account',7,'insert',X'a0d2cfe35c716deef946cf5096c0b6bdcf1fae6f7daf7d916959807cb24225d2',NULL);
INSERT INTO trail_change VALUES(8,2,'account_roles',5,'insert',X'7b9896d79df066f45aa25b3db791ca0cafade7f89cfc3874ac5524ee718c4ffa',NULL);
INSERT INTO trail_change VALUES(8,3,'account',7,'update',X'88825f75091604ea86c5b91fcde6d94780d4bbd67bfffe1e050ffd91708c7216','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(9,1,'account',8,'insert',X'4b011fed54ea6f86f0c6a2b316e6c08955d9f75387be143616b248cd1e02c667',NULL);
INSERT INTO trail_change VALUES(9,2,'account_roles',6,'insert',X'35ff63067f897dcbd35e732c8ccaef33322465a1f7c2c3349f368188333475ab',NULL);
INSERT INTO trail_change VALUES(9,3,'account',8,'update',X'6008aeba3e236945392b76ce4cf5d3c923d83600b3ec8083ee6a6612f5a9f459','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(10,1,'account',9,'insert',X'f38a852999e261c1809b08cc19819e9aba18ac466911860cda82033c0dca5509',NULL);
INSERT INTO trail_change VALUES(10,2,'account_roles',7,'insert',X'4a748cd19066665807b19ac026c4b79d629e7912763d50e18768d06af7bf6b46',NULL);
INSERT INTO trail_change VALUES(10,3,'account',9,'update',X'e2ab2fe7f848ab47c1e8062143032ec4c61034763bf707a35b6184821fe8f381','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(11,1,'account',10,'insert',X'ded4fa242f6dce13b160097486b24a37894102e123e87aeb545d68770b69417c',NULL);
INSERT INTO trail_change VALUES(11,2,'account_roles',8,'insert',X'211090efd76f67e043d97b7287bdc358981fd06b36f50b2b562ed8fd0cc037e5',NULL);
INSERT INTO trail_change VALUES(11,3,'account',10,'update',X'0c7ad3e038568bc6b75e5a1cc37badacd52a2ec7c4acd89964d168db04d2778a','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(12,1,'account',11,'insert',X'108afc61d653a2925e8a7343ae84b049d24728f0887c6b56c300e94a48304b1c',NULL);
INSERT INTO trail_change VALUES(12,2,'account_roles',9,'insert',X'43e4e9781a6bb1ad0ce61325f26d3ebd50b44a1555fae48aec406ff70e43ff6e',NULL);
INSERT INTO trail_change VALUES(12,3,'account',11,'update',X'273716c0396bdb9b77031332cd6a2b9d138c7ca66c4cc349a33caaba91835e3a','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(13,1,'account',12,'insert',X'b2534f3838aef7f4fab601cd2b8c35ce9d66c672efdeac8a6b4c274087ed57ed',NULL);
INSERT INTO trail_change VALUES(13,2,'account_roles',10,'insert',X'4027e9d551ae7d8d196cb6f6f95dc9d3e773911dc32126a87198aadc3e1ff27a',NULL);
INSERT INTO trail_change VALUES(13,3,'account',12,'update',X'7fcafc077a56215882aa4d96c935d6140682223fe6c2f88f6f0617c7e4d5d4db','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(14,1,'account',13,'insert',X'9afd2cdd293e094276aeaa559fadac2e20d0251a808c1683494da87147848c70',NULL);
INSERT INTO trail_change VALUES(14,2,'account_roles',11,'insert',X'8fa37da64813a877d9ddb516c2fcebba2cbeaafc8d3fbfbd6608d0b4a06e719f',NULL);
INSERT INTO trail_change VALUES(14,3,'account',13,'update',X'7e9aea4f959301ca42c8d8d300c84d7b7c20cee328bb38ade94b7d8cf84d512c','{"password_hash":["kept from the trail","kept from the trail"]}');
INSERT INTO trail_change VALUES(15,1,'product',1,'insert',X'73e3d8dc921ca84d7400cb38b9acfaec47497419062f0df8a63c2ca70abed16b',NULL);
INSERT INTO trail_change VALUES(16,1,'presentation',1,'insert',X'37dfca143a680ac8d650a504a2012ffe575742a0c026021f79624a384a421f1f',NULL);
INSERT INTO trail_change VALUES(17,1,'formulation',1,'insert',X'a8026ab20c84352a7b5bf877a51ac6ba2d3eba64b4d747d1e64ac5c9bc49a2dd',NULL);
INSERT INTO trail_change VALUES(18,1,'material',1,'insert',X'67a4f3988a3050dc3dd3e1569896e340eddb8fb8569a727a04c000ce34c77cd4',NULL);
INSERT INTO trail_change VALUES(19,1,'material',2,'insert',X'0821437a77b561c645a33cceb79db27fa29ae0018a690e30a17f86deee37494f',NULL);
INSERT INTO trail_change VALUES(20,1,'material',3,'insert',X'c0a7ae37e9f1651b8adf2b73fef7839d87bf42d92e6b11c877c0af5b9709a680',NULL);
INSERT INTO trail_change VALUES(21,1,'formulation_version',1,'insert',X'bfe45426a3ee02fd21f26fafcb6331c7014a1e203052012f6a098bb0763e26ac',NULL);
INSERT INTO trail_change VALUES(22,1,'signature',1,'insert',X'a538405a4ab8900921beeee45fef8a39069d9323d370b654534ed036c5fafcb5',NULL);
INSERT INTO trail_change VALUES(23,1,'signature',2,'insert',X'1c7025e48edc6c34e2925802faf799ceb1bc8d85b81ea65e41ee5efa4d595fb7',NULL);
INSERT INTO trail_change VALUES(24,1,'method',1,'insert',X'e75e3a1105f90278a2f50c9c4b187d0bd3e30b89b22e1c7b187b986a3e7cf531',NULL);
INSERT INTO trail_change VALUES(24,2,'method_version',1,'insert',X'e7feb6e342cdcd923bf826147472334f36774849b14dce5929184b9c89dd25de',NULL);
INSERT INTO trail_change VALUES(25,1,'signature',3,'insert',X'0a7985c80ff70f20708b7a4c9463bea45a94948d76a3f3adb1f8710ce374c11e',NULL);
INSERT INTO trail_change VALUES(26,1,'signature',4,'insert',X'167021a56e1f40db81027d059307d3c1292c3d8eb868a3afb5877fb3f8fe437d',NULL);
INSERT INTO trail_change VALUES(27,1,'method',2,'insert',X'1e80a26f38924599d6b6eb5174c2fbe127cf9d41179c3921edcc2aeb11455d9f',NULL);
INSERT INTO trail_change VALUES(27,2,'method_version',2,'insert',X'3a086abeecf53687daafb5eb4f5c2f9d78bc86bbdabbc18bf443724ca1c30db9',NULL);
INSERT INTO trail_change VALUES(28,1,'signature',5,'insert',X'a1828daf01135e8cbff0670546599807c38f65597dcffce5d2fc29a3dcdf5a09',NULL);
INSERT INTO trail_change VALUES(29,1,'signature',6,'insert',X'bb1bf3e013c1532b84235539fc150dd116da4d99925695b0a76c0f67a1035cd8',NULL);
INSERT INTO trail_change VALUES(30,1,'specification',1,'insert',X'b0a5e986553fec2a581489c2d3aa319478fdff2c8faf0293a6a4568be22f93a8',NULL);
INSERT INTO trail_change VALUES(30,2,'specification_version',1,'insert',X'80c7aa2bcee5b522559b02ac345e913faee6f9ae7ce75a8c5e17c92bd4d2cc76',NULL);
INSERT INTO trail_change VALUES(31,1,'signature',7,'insert',X'c1afc54e8dcdf59988356a98d63a92f58d92807d1b106e409b9812bf8b44e39d',NULL);
INSERT INTO trail_change VALUES(32,1,'signature',8,'insert',X'd0b73cec04491fb634f4666d0e7160ebe4a5e51cb13f93aac9ecd96fd6c689da',NULL);
INSERT INTO trail_change VALUES(33,1,'qualification',1,'insert',X'957bf2b2ebcf171050b503326a31f095fa9c16bc8203100e37a8dea884810c2b',NULL);
INSERT INTO trail_change VALUES(34,1,'qualification',2,'insert',X'fec5bd83dec942d5f3cf144f7ea3a8ee92a1cf23046bd24b77511614c04add1f',NULL);
INSERT INTO trail_change VALUES(35,1,'qualification',3,'insert',X'cda6f28df632041c5a74086b1460df5c849b3cea4498e7acb800f4f30897cbb6',NULL);
INSERT INTO trail_change VALUES(36,1,'qualification',4,'insert',X'6e6ac0a0d202506647077963015c3d50bc60928317b54e5649e278a1c86221fb',NULL);
INSERT INTO trail_change VALUES(37,1,'shelf_life_assignment',1,'insert',X'bb68ba3da9e01be1c8b61b4361364c91c59c9f142ad1ad9acc72659df1ada641',NULL);
INSERT INTO trail_change VALUES(37,2,'signature',9,'insert',X'749579b2fe87b21df24cf2ff4aa08113e58d454f2a9a29d118041cd074496134',NULL);
INSERT INTO trail_change VALUES(38,1,'lot',1,'insert',X'74c0f8cad3a07cad45b7bf236b5aa108faff3b8e65f976286ef936f5d0744e53',NULL);
INSERT INTO trail_change VALUES(39,1,'sample',1,'insert',X'5ca83d753e5de9260f1172214477cdb9136e588083b4553a4f9cde0ee4c17316',NULL);
INSERT INTO trail_change VALUES(39,2,'sample_test',1,'insert',X'b904d06b27cad5046135ae817017602897b9616dd7ca50b37aa2dcfce2332b44',NULL);
INSERT INTO trail_change VALUES(39,3,'sample_test',2,'insert',X'48dd14702112656cddea30e20dcbd472f9241fb973bdcfca01518195f36362e6',NULL);
INSERT INTO trail_change VALUES(40,1,'reading',1,'insert',X'd9fb8e10da6a5ae327f2c57f89f291e930637276bf59ac312ecf6e6e7e1d118d',NULL);
INSERT INTO trail_change VALUES(41,1,'reading',2,'insert',X'e499851e6c441ba0d635cd52e0c82dbb9a52e0c1b3c19ea12036ee2675a52159',NULL);
INSERT INTO trail_change VALUES(42,1,'result',1,'insert',X'80d869621d65a3869a5397f07a9e05c0d699e8cc2d8443eac0731eb114ae322a',NULL);
INSERT INTO trail_change VALUES(43,1,'reading',3,'insert',X'a2ab41e064b9330287a3410f11b9d8a16cdb73d3c48a6fdb1852830a3ad9a653',NULL);
INSERT INTO trail_change VALUES(44,1,'reading',4,'insert',X'6a4645498c9e5b365486343277c5981a5bb26ee36a1086af06bc78b9a4996c94',NULL);
INSERT INTO trail_change VALUES(45,1,'result',2,'insert',X'3ff8fbdc14bf8d2bdc180c2f433efdade30776433bcdbb6362e92b0a5f033b46',NULL);
INSERT INTO trail_change VALUES(47,1,'result_check',1,'insert',X'c6956e579a4d76ef81737650c085b6c29b5a43b78cf5dfdac65a6a492999fc3a',NULL);
INSERT INTO trail_change VALUES(48,1,'result_check',2,'insert',X'e299c2d60b60491e3ebbc4b81f04ebce31bcee80040afad91867f53f22774206',NULL);
INSERT INTO trail_change VALUES(50,1,'review_decision',1,'insert',X'eec49efb92077f0d1465bb6c37d434cbb93969fc530efdafb9eeaa38df350e12',NULL);
INSERT INTO trail_change VALUES(51,1,'signature',10,'insert',X'9fe855da32d9c71c512f8f123a68fbd5e82e27df98119d0132168bcb692be607',NULL);
INSERT INTO trail_change VALUES(52,1,'signature',11,'insert',X'2a2ff802bac0bc6064425478de8c8df44f5c3af68338648259018aa778f99d33',NULL);
INSERT INTO trail_change VALUES(52,2,'lot_decision',1,'insert',X'b72f01404ac9f2c08c0dfc0cabc72a0b3675264db0cfb380d0d7cff543605d43',NULL);
INSERT INTO trail_change VALUES(53,1,'sample',2,'insert',X'5e1fe1daa1f07baccc2a9b3ea586ce17b83b8a8c9605b1419dcfb4517241b61a',NULL);
INSERT INTO trail_change VALUES(53,2,'sample_test',3,'insert',X'fa253b0a603329259cb18e71b3c88ab98dd9b089fe30393fc290166165a0cd26',NULL);
INSERT INTO trail_change VALUES(54,1,'reading',5,'insert',X'725beaea4d934432feb47b934c5c072ee70abb420d35168687e4c3b6afff25bc',NULL);
INSERT INTO trail_change VALUES(55,1,'reading',6,'insert',X'8dfd4f1596f7e639b5be1b394f8b51da368bfc9860fc14619504f67c52ae1741',NULL);
INSERT INTO trail_change VALUES(56,1,'result',3,'insert',X'457b49de93f903720d8f015f04b98eb49a1b8f1ebdd59c2e06c1c1d920898605',NULL);
INSERT INTO trail_change VALUES(56,2,'flag',1,'insert',X'b2c45ffe70fd01fca2305ba92452efbb184d2b64bae0f3b130e35f1f5bd9e2d8',NULL);
INSERT INTO trail_change VALUES(56,3,'investigation',1,'insert',X'020a5535b58c2b8f64127b425e0c215f6ce9a0e61dc7302d9525bf38435c8acc',NULL);
INSERT INTO trail_change VALUES(57,1,'result_check',3,'insert',X'40b47a8376a7dd096b5834375f15a474628f36e5d24a363704ad9891b88600cd',NULL);
INSERT INTO trail_change VALUES(58,1,'chamber',1,'insert',X'74b6b5f9203c8e4fbbacdfddae7c457a0a649225fb0f16ecfa710db501f43f21',NULL);
INSERT INTO trail_change VALUES(59,1,'chamber',2,'insert',X'ae9dd652b4911222101002350133fbbfab514611d782d4ac9262c06714c3bfd3',NULL);
INSERT INTO trail_change VALUES(60,1,'chamber',3,'insert',X'6794705f84fb466b5f9e365f1d14fedbc9a7093c22e90c8204904be14f361a5e',NULL);
INSERT INTO trail_change VALUES(61,1,'chamber',4,'insert',X'f7645a7d2157fb764aa4ea9766832c329557639a8869fecfd8bde3d4821cc9fe',NULL);
INSERT INTO trail_change VALUES(62,1,'chamber',5,'insert',X'070df9445082cd503e81c4ea290e37d8b05e495a665852c219d9556069d9890a',NULL);
INSERT INTO trail_change VALUES(63,1,'chamber',6,'insert',X'15ce199b61e036a36870e64aa73e40079f80bf2c23eb8930aaa7c240b366f358',NULL);
INSERT INTO trail_change VALUES(64,1,'chamber',7,'insert',X'7a5400cf79f0b88d3ba3dd7718b8abc67a84636c17b5f7efa92f9c5e79877dbb',NULL);
INSERT INTO trail_change VALUES(65,1,'chamber',8,'insert',X'bf1d38e187398f0cb46644ab79b34699ef4cb709d1827b4c30e402a749498bd9',NULL);
INSERT INTO trail_change VALUES(66,1,'chamber',9,'insert',X'b85d9ac8da287432c8fe3dfae242d642465b8989d75a29c827b8ab61885ede38',NULL);
INSERT INTO trail_change VALUES(67,1,'protocol',1,'insert',X'95f0f5c2807eaf9e325ce0373b6b6be1429048fdfa250c6a22b6d8187ace1a9e',NULL);
INSERT INTO trail_change VALUES(67,2,'protocol_version',1,'insert',X'7851dff35b04411be0c328f94ad293c561e174541f14b01b878461249fff3349',NULL);
INSERT INTO trail_change VALUES(68,1,'protocol_version',1,'update',X'a0ab3f3bb8a7fdd18bd617dd96dcce4c8af6116229f20a0cae6280a32c9753f4','{"content":["{\"programme\":\"development\",\"specification_version\":1,\"arms\":[{\"condition\":1,\"orientation\":\"upright\",\"limits_do\":\"out-of-specification\",\"is_labelled_condition\":true,\"is_contingent\":false,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":3},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":9},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":12},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":18},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":24},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":36},\"tests\":[\"assay\",\"density\"],\"window\":null}]},{\"condition\":2,\"orientation\":\"upright\",\"limits_do\":\"out-of-specification\",\"is_labelled_condition\":false,\"is_contingent\":true,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":9},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":12},\"tests\":[\"assay\",\"density\"],\"window\":null}]},{\"condition\":3,\"orientation\":\"upright\",\"limits_do\":\"significant-change\",\"is_labelled_condition\":false,\"is_contingent\":false,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":3},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null}]},{\"condition\":1,\"orientation\":\"inverted\",\"limits_do\":\"out-of-specification\",\"is_labelled_condition\":true,\"is_contingent\":false,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":3},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":9},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":12},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":18},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":24},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":36},\"tests\":[\"assay\",\"density\"],\"window\":null}]},{\"condition\":2,\"orientation\":\"inverted\",\"limits_do\":\"out-of-specification\",\"is_labelled_condition\":false,\"is_contingent\":true,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":9},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":12},\"tests\":[\"assay\",\"density\"],\"window\":null}]},{\"condition\":3,\"orientation\":\"inverted\",\"limits_do\":\"significant-change\",\"is_labelled_condition\":false,\"is_contingent\":false,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":3},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null}]}],\"tests\":[{\"test\":\"assay\",\"title\":\"Assay\",\"method_version\":1,\"is_information\":false},{\"test\":\"density\",\"title\":\"Density\",\"method_version\":2,\"is_information\":false}],\"spare_containers\":2,\"retain_containers\":1,\"why_no_intermediate\":null,\"worst_orientation\":null}","{\"programme\":\"development\",\"specification_version\":1,\"arms\":[{\"condition\":1,\"orientation\":\"upright\",\"limits_do\":\"out-of-specification\",\"is_labelled_condition\":true,\"is_contingent\":false,\"ages\":[{\"age\":{\"months\":0},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":3},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":6},\"tests\":[\"assay\",\"density\"],\"window\":null},{\"age\":{\"months\":9},\"tests\":[\"assay\",\"density\"],\"window\":null}]}],\"tests\":[{\"test\":\"assay\",\"title\":\"Assay\",\"method_version\":1,\"is_information\":false},{\"test\":\"density\",\"title\":\"Density\",\"method_version\":2,\"is_information\":false}],\"spare_containers\":2,\"retain_containers\":1,\"why_no_intermediate\":\"development lots are kept at one condition\",\"worst_orientation\":null}"]}');
INSERT INTO trail_change VALUES(69,1,'signature',12,'insert',X'e9a74331e192e72bb0da3fa3cb7433d29b7dce240a30828d5c4591e055e0b1fe',NULL);
INSERT INTO trail_change VALUES(70,1,'signature',13,'insert',X'ef9c976254f1655a696da919bdcab62fe2f35325ee02623808795ec760020f9f',NULL);
INSERT INTO trail_change VALUES(71,1,'study',1,'insert',X'4e211b5dd76f2c6aba56e6be58484a19be79c3b82215e653440c9706b0eeb200',NULL);
INSERT INTO trail_change VALUES(71,2,'study_arm',1,'insert',X'b61b35ae357aff87a432e99d01cafc041315b2f7cca947fa269b5d51d6584c03',NULL);
INSERT INTO trail_change VALUES(71,3,'container',1,'insert',X'8b491619912445a393de11ecde863ab450ad87c36e29f1bc03542622e174fc7d',NULL);
INSERT INTO trail_change VALUES(71,4,'container',2,'insert',X'eff22e303f66cf206356b5badcc6307d9a558b10fa1159607dd0df2db2a6f432',NULL);
INSERT INTO trail_change VALUES(71,5,'container',3,'insert',X'd07a33f24a6beaf20d4beecce1dd69ebca233009d7e4eadde8af02ecf63affd3',NULL);
INSERT INTO trail_change VALUES(71,6,'container',4,'insert',X'e5096208d26cb36f29f4e1014528f2e5b13de40612c2563facdbdda37d705dd0',NULL);
INSERT INTO trail_change VALUES(71,7,'container',5,'insert',X'c7ecb0359ba5d83d72bcc1b8a9bdb27e4fc49509a826f7651945380e54f01069',NULL);
INSERT INTO trail_change VALUES(71,8,'container',6,'insert',X'90c821fa2c9561335771a2b925a44e4642381d2b6872be74333c220296495725',NULL);
INSERT INTO trail_change VALUES(71,9,'container',7,'insert',X'4bb85f5d683bc0e15766f67a93937d62277ad82af1bfaefabc91309c9a6350ac',NULL);
INSERT INTO trail_change VALUES(71,10,'pull',1,'insert',X'd660f4b804c098863e77615bd09a1583a4a6bbbd77a8d343aa4213d52bd55ec5',NULL);
INSERT INTO trail_change VALUES(71,11,'sample',3,'insert',X'590cd6fd04af7dd011e0190222cabcb9cfe20487194132a0421a9b7408289bfb',NULL);
INSERT INTO trail_change VALUES(71,12,'sample_test',4,'insert',X'10da80408dce831ee7a62803572f8f65f0b1c5bc575959db028c411d2dcb6431',NULL);
INSERT INTO trail_change VALUES(71,13,'sample_test',5,'insert',X'2613f20e3d2b96bf4e25545611288e2a9244ae018a4aa9a05853013a3076d712',NULL);
INSERT INTO trail_change VALUES(71,14,'pull',2,'insert',X'7d42fc9b9b02975bb69a6b40f5fb9bcb11f9ea6ea80b9953d0d7dbe331f90d58',NULL);
INSERT INTO trail_change VALUES(71,15,'sample',4,'insert',X'0c8f3d17a876e08fa81bb5e09f2ecb5e04afc789491fdf2edfadea6a178ae826',NULL);
INSERT INTO trail_change VALUES(71,16,'sample_test',6,'insert',X'84a5bae8e82b37399e24162b8b2cefb78251ec221196def5a128f682aae4f2c1',NULL);
INSERT INTO trail_change VALUES(71,17,'sample_test',7,'insert',X'2eeffc5c439a5045a5d0ffedbf5692ff8184044d489b779a8ab3f94b9dac2b24',NULL);
INSERT INTO trail_change VALUES(71,18,'pull',3,'insert',X'501624c675bab16bbc6d31898487280ee74501ca16bd0c98562c9c12ae798b9d',NULL);
INSERT INTO trail_change VALUES(71,19,'sample',5,'insert',X'7d5adba01bdf7dbd0f1f50a3f1196298abf50cf2f1f429996f4cf1fc9d4b1d95',NULL);
INSERT INTO trail_change VALUES(71,20,'sample_test',8,'insert',X'4d26642f37ac3a2f8b5ca3fa3374b92e1807f5f58883837e386498d844db073d',NULL);
INSERT INTO trail_change VALUES(71,21,'sample_test',9,'insert',X'b6b7e15b59ba7daa2abc3a0290051141a4011dd6f23ff73dafc1c5877fab18bb',NULL);
INSERT INTO trail_change VALUES(71,22,'pull',4,'insert',X'8c739aa1276020d752e6dc2b0ba21afa22eaa1d6fe37f715eaa0184ad61eaee2',NULL);
INSERT INTO trail_change VALUES(71,23,'sample',6,'insert',X'969b9d7a0a30ea73759a2007d13cc58b0034c1ff7edeedfeb95c92cbfeb31881',NULL);
INSERT INTO trail_change VALUES(71,24,'sample_test',10,'insert',X'0b055373785ee53c2e7773541f38b61408432d7368b4e31adad704ed789a7c39',NULL);
INSERT INTO trail_change VALUES(71,25,'sample_test',11,'insert',X'5199c7e496756c9327adbe5ccaf3c1d618b86f5d77353077ac2ee3ed4fcc4312',NULL);
INSERT INTO trail_change VALUES(72,1,'container_event',1,'insert',X'7f56ff2ce35c6e736cf1a9d401ad461da2a76981580dbc9587e6d1f6c514608f',NULL);
INSERT INTO trail_change VALUES(72,2,'pull_event',1,'insert',X'8163360ce00727c7e4432eb6cb5e94e8bd6ae559dca65ad5196324ccb83200b4',NULL);
INSERT INTO trail_change VALUES(73,1,'reading',7,'insert',X'ed32c0b50ce4485d98065c1d6fa53b695a83b4792b7fe4cbebfcbff99955b259',NULL);
INSERT INTO trail_change VALUES(74,1,'reading',8,'insert',X'dea4284e83a07a2de5bae28ceaa1c4794c45e04bbd9d2c117347926bea7b051f',NULL);
INSERT INTO trail_change VALUES(75,1,'result',4,'insert',X'4389ce215bb1b96fad5497653909c778b2fb0583b770a9a2d171bb4990799b2b',NULL);
INSERT INTO trail_change VALUES(75,2,'flag',2,'insert',X'cfb8ad1724f059f83952135db1189ec8c46cbc4b02c56d8229163714e6ca264d',NULL);
INSERT INTO trail_change VALUES(76,1,'reading',9,'insert',X'fff3a74979ed39139e27dc38abb2f403fc3ee4fe4c4c417f1a0a638aaa4257b3',NULL);
INSERT INTO trail_change VALUES(76,2,'result',5,'insert',X'5f932577f978fe4e3cfedd4674fea1c24c4bf3511ff2f16b204100b735cb2b6e',NULL);
INSERT INTO trail_change VALUES(76,3,'flag',3,'insert',X'8e1ecb5fdb651e3538a220c874b2035a7beac8351f11a63d0d04b554da837619',NULL);
CREATE TABLE trail_seal (
    act integer primary key references trail_act (id) deferrable initially deferred,
    digest blob not null
) strict;
INSERT INTO trail_seal VALUES(1,X'25a8fc9e12cc72893e6b8b077b10ff581f9b6b9ffea7d3d53b2da805a871b216');
INSERT INTO trail_seal VALUES(2,X'2de5b69824434153500ea05887831fc36c7cc68916c3dceedc587dcddf175b7f');
INSERT INTO trail_seal VALUES(3,X'258c44daf342b836ce2da0784fa7d94698c4c4b7c931e50160b535ca98efbad2');
INSERT INTO trail_seal VALUES(4,X'7cfe4b06277ac3f7769c8ebb9c0b0d6e564316edf9897a7a832c5083420e4ca1');
INSERT INTO trail_seal VALUES(5,X'b4a1fd51406c40f82a74fd36eba65ab1367b6ea98a8eb48993204de86024a693');
INSERT INTO trail_seal VALUES(6,X'25be4e472a948cb05c93f0f5de5c61b9952321fc62ef619b0c3787c6f7f3ff82');
INSERT INTO trail_seal VALUES(7,X'64e1c60a37494c0a0c9be34491e6e55a560d76396167f336d37b0bab15eae177');
INSERT INTO trail_seal VALUES(8,X'ff64743b0392f92bc10473d1ba0f0a19ee7f98ca1980116335b2a76eb19911e6');
INSERT INTO trail_seal VALUES(9,X'386f6a5a55adca82f875cfd7b09e061cea519a6d734d653627424bc2a7283201');
INSERT INTO trail_seal VALUES(10,X'3a104a7936bfddc156fa2613b198515c0cf7a0b5f7e4f47ed427fbf8d27afef3');
INSERT INTO trail_seal VALUES(11,X'51ef3e4d0b4fdefd066766b0e18cb0960bfb38fb2dc8cc8afc0886112e774349');
INSERT INTO trail_seal VALUES(12,X'5e04a87fdee410a19884787bfd9d9a29a367ff5d0dd5362f14ed4e9c8b104594');
INSERT INTO trail_seal VALUES(13,X'a13971162c8f5100f520dae32ae2e3d231008dcdc9ae9a0fd7c41a3995525b0e');
INSERT INTO trail_seal VALUES(14,X'0b7cfa83db3df36f1c2d1e9d668d9bf195ba482b38fac728537101a30f965851');
INSERT INTO trail_seal VALUES(15,X'dd3d3e8cd02c5f6d13fa120f63bf9b9a34e453e8990cfbfc390e5cddcf2ccf84');
INSERT INTO trail_seal VALUES(16,X'756d0ced973d709ebc9524175cc4b2c6510e83aa0d7bc90a92e72b0e333043a2');
INSERT INTO trail_seal VALUES(17,X'd5be47c1c4d47dc3c16584f9a790903dfcf29b55a0c0a2d0b7468e608b057cad');
INSERT INTO trail_seal VALUES(18,X'282cf777718dc8e2c75a0d785a1728f7338a05b19230559346a7da7879bfa617');
INSERT INTO trail_seal VALUES(19,X'4fad02542fa9b130833d54ab15c9f85881e416ce9cc2aafa725aec096686f7ec');
INSERT INTO trail_seal VALUES(20,X'e57a158c9dff3780986ffd9c32eae2c43ad779df9fda9628c1166b868b9aab0c');
INSERT INTO trail_seal VALUES(21,X'0ceb65fe55135de3375e359b43589401516e21cf0b04aba970759f7594f932df');
INSERT INTO trail_seal VALUES(22,X'1eeb61fff26a87be2bb846c8e2276a889da89fe7b28042bd286403eb54ba129f');
INSERT INTO trail_seal VALUES(23,X'59f9ff52efa99a03d01562db3ab0da16fc01b26f2496bc5f98b495882d2e7b74');
INSERT INTO trail_seal VALUES(24,X'6757b43c960b694bace6c9a4740f1abefcb290101753c6ad875b1c2df37d0c26');
INSERT INTO trail_seal VALUES(25,X'5f59974c14497369621f58dddbf753fcd03a3ba19a2120d14ec98aa0996e933f');
INSERT INTO trail_seal VALUES(26,X'a1d1e9fe7123eaed752fa56bdb7f3c13074d07d9e9a1f4d8fff4d14faaa2fe1f');
INSERT INTO trail_seal VALUES(27,X'cae6be0acf6e5cdf258298793c7d052194f1563d3f8b464494254f3b9eb1e8fd');
INSERT INTO trail_seal VALUES(28,X'6d5fb85b5c3780f5cac1854e36759ea7cee0d73715b1505ee2f84da8b6820e27');
INSERT INTO trail_seal VALUES(29,X'ee8314d854cba8bef1cff78faa463898f18fb0d1d1c1d9bfb7452722981154ab');
INSERT INTO trail_seal VALUES(30,X'c64a45b6523ba887f0190c19f0aafba9a177c9d2fa956509ad9dc795a5551f59');
INSERT INTO trail_seal VALUES(31,X'7791a61a9c919b7047e7f95f994b34d47cde67a94c1171d7fc86c3816ae29040');
INSERT INTO trail_seal VALUES(32,X'f3c518f5bca7e047974186dc3e3690600b6ebbbf883fb5af793f42f929c912c8');
INSERT INTO trail_seal VALUES(33,X'60954804f765c125e5d269f53ca51f2bbf40be13f1dd4e877cd2ba57936db3ee');
INSERT INTO trail_seal VALUES(34,X'8d2fa000e22b362b8b7b246c4fe82dbe67d2086c65ce3366b1229ef53214e84a');
INSERT INTO trail_seal VALUES(35,X'14e419f503f6d27c4923b39015526bfafa9a676a79e33c56b1c2d19c658fe0a1');
INSERT INTO trail_seal VALUES(36,X'865b678930b9b946b4941897ae683245a1dfdcad9df9d1c7e0b4b8ee6e20c10d');
INSERT INTO trail_seal VALUES(37,X'0b2a5bf0c29dddda0b88c4b2decf265ed6e3a342b96592a371fe858659e24aee');
INSERT INTO trail_seal VALUES(38,X'48d1f908acc864e69a7ac71ce23be663fb35553a056715c7e97c108e0c5a33d7');
INSERT INTO trail_seal VALUES(39,X'd2b55b5a50a0ce2448001e212557ccc5dc5583e70e519045a6a748cc0e9581b1');
INSERT INTO trail_seal VALUES(40,X'745a8ce9c709ed8835933b3ee699aec458e9e057090691efefe61fc573daf002');
INSERT INTO trail_seal VALUES(41,X'd664754c07316aa6b334b1c3c3530babb5965f2c38edaba8bf1cfe3a4b8dad33');
INSERT INTO trail_seal VALUES(42,X'6fb1edade1def82c99dfe21ae0b399fe08646d4c71333bb7785aa05853fc1695');
INSERT INTO trail_seal VALUES(43,X'58de5915070a6ed7c0e5272f5e3ef3c7eb321c9be7f0642812dc4e5fb0d919b8');
INSERT INTO trail_seal VALUES(44,X'ede87766f4e4d3361d6262ecdf8b6ab001ad7ed937c206ae45503f78dfd999a5');
INSERT INTO trail_seal VALUES(45,X'c43b3da977e23222c2c09fded621ee5f31d7dab1459799bfb841f6223706151f');
INSERT INTO trail_seal VALUES(46,X'6944037422ab6ef0b9f1fcf6f479f169f59326437336eabf12f140e55ca2af36');
INSERT INTO trail_seal VALUES(47,X'd9fb91f9c250404285f3e54024e539508f9f57dc0eb624de0c4f7b06e36d5b48');
INSERT INTO trail_seal VALUES(48,X'ef17be70df0b2fde84497130d5ded02a3f388d38c43c6b1cfd9e87368c60817f');
INSERT INTO trail_seal VALUES(49,X'62e85cbe28d8cd3ec1d9bb7c437e90ee39016412b325141b8495291e71d8d12c');
INSERT INTO trail_seal VALUES(50,X'260635ec0950d13c2e07649840880c62bb66047099ed8c788dfd1efaeb7a5029');
INSERT INTO trail_seal VALUES(51,X'd2c3a683a27797cce2467f45053b3c4329245260f3508bad3d10eb9196633a3d');
INSERT INTO trail_seal VALUES(52,X'4c60c26f7fc5ec980bb7cbf8e9918022f704e07face1a2c678a2f5e4a84d79a0');
INSERT INTO trail_seal VALUES(53,X'28eec47d60726de94cbe1e4eb1b89270a6f91025f47eaad35875d260aecfd6cd');
INSERT INTO trail_seal VALUES(54,X'5dcffc6606f670cebddb01d1ea1d126a444d6700538c0de23e78ab8b54652200');
INSERT INTO trail_seal VALUES(55,X'473ba0f6a5533c27fff1a6a2fbc5b9db6350fee7af201d68a8c16c320163c559');
INSERT INTO trail_seal VALUES(56,X'1e8404a829a7cc5af33d968843ecb3e9773bd2d38f01aa5b34d2a5e06cc4a263');
INSERT INTO trail_seal VALUES(57,X'0b8b490a7a492377c5639def51690a39c71222ad81fec9d65b0989f3c8ed344c');
INSERT INTO trail_seal VALUES(58,X'c392fff116f9b006df983c2ba906c7e42ae604460063f004afcad27e28db8ca2');
INSERT INTO trail_seal VALUES(59,X'49aaeb6e682f9e248010701bb3347665c80b1a5c25279ad1970f633dedb12b0d');
INSERT INTO trail_seal VALUES(60,X'd5afbda397c16a7da0965ea684e68ccf02570ea4b5f6f09012a7e49b88c34e1b');
INSERT INTO trail_seal VALUES(61,X'cc2dfd0f81277963552f430f019cbd4be2f1508163f2367462b1d7f5a0e18014');
INSERT INTO trail_seal VALUES(62,X'02280cb88a77e6d28d54855dd95f1a9db1d52e835cc9ebdd99306dfcc26140e2');
INSERT INTO trail_seal VALUES(63,X'fa952eefd22bd0d2bb3b382c81abd56c43e8ca268b560a0327606caea6473784');
INSERT INTO trail_seal VALUES(64,X'5b4e02ed1770ace649fff76acf822e240f5d20845c37969ac4ad237208cbbea9');
INSERT INTO trail_seal VALUES(65,X'aa6e126383200a97e5bc747fac71dbcbbc421295e73eb506489e6d52ab0c8148');
INSERT INTO trail_seal VALUES(66,X'6d117afdcc8f128f1215d73a488b862559864a068e3c2d337e9a5cf04e84d837');
INSERT INTO trail_seal VALUES(67,X'25f0dd96459b8f5165052efabc3e27255c21429c0375b650e50043f1983e6392');
INSERT INTO trail_seal VALUES(68,X'9952fcbc73844df16b9f4266a70a907721360429384e7dd4bc0999f52d5e3cc2');
INSERT INTO trail_seal VALUES(69,X'c1128e62fc834ae3910995c9b51840d223d6063feba2e48216c533dec5770a2e');
INSERT INTO trail_seal VALUES(70,X'359a51c2fe30466de09bd7a47461480fb24d51bc4f3995cf48304d39d87968e1');
INSERT INTO trail_seal VALUES(71,X'577e94b350fff5d1327d4063d97bd91083df08e0e2d8f2be3776438b94d46d24');
INSERT INTO trail_seal VALUES(72,X'1119629422bba0a3f49d1d0b1983ce90ebf443ee2d73a62a7a670a224c5ae7c4');
INSERT INTO trail_seal VALUES(73,X'c31d81d35b8d53632bea3205d0e939e2a62ceb2729a4b38557bcad0d9b330e07');
INSERT INTO trail_seal VALUES(74,X'a9ea64a82d303b4e91218a8bf93ecb31ab8cba99a4fc2471abe2053800891656');
INSERT INTO trail_seal VALUES(75,X'50d1cffcc07f1543705e5c4e023e15b2983fe4e8f3995265f742ce7033653021');
INSERT INTO trail_seal VALUES(76,X'd6306cf680f75b4c4ef832608ffa70281e46e0fd0d4c68195121568ede637017');
CREATE TABLE trail_subject (
    kind text not null,
    subject integer not null,
    act integer not null,
    primary key (kind, subject, act)
) strict, without rowid;
INSERT INTO trail_subject VALUES('account',3,4);
INSERT INTO trail_subject VALUES('account',4,5);
INSERT INTO trail_subject VALUES('account',5,6);
INSERT INTO trail_subject VALUES('account',6,7);
INSERT INTO trail_subject VALUES('account',6,33);
INSERT INTO trail_subject VALUES('account',6,34);
INSERT INTO trail_subject VALUES('account',7,8);
INSERT INTO trail_subject VALUES('account',7,35);
INSERT INTO trail_subject VALUES('account',7,36);
INSERT INTO trail_subject VALUES('account',7,46);
INSERT INTO trail_subject VALUES('account',8,9);
INSERT INTO trail_subject VALUES('account',9,10);
INSERT INTO trail_subject VALUES('account',10,11);
INSERT INTO trail_subject VALUES('account',10,49);
INSERT INTO trail_subject VALUES('account',11,12);
INSERT INTO trail_subject VALUES('account',12,13);
INSERT INTO trail_subject VALUES('account',13,14);
INSERT INTO trail_subject VALUES('chamber',1,58);
INSERT INTO trail_subject VALUES('chamber',1,71);
INSERT INTO trail_subject VALUES('chamber',2,59);
INSERT INTO trail_subject VALUES('chamber',3,60);
INSERT INTO trail_subject VALUES('chamber',4,61);
INSERT INTO trail_subject VALUES('chamber',5,62);
INSERT INTO trail_subject VALUES('chamber',6,63);
INSERT INTO trail_subject VALUES('chamber',7,64);
INSERT INTO trail_subject VALUES('chamber',8,65);
INSERT INTO trail_subject VALUES('chamber',9,66);
INSERT INTO trail_subject VALUES('condition',1,3);
INSERT INTO trail_subject VALUES('condition',2,3);
INSERT INTO trail_subject VALUES('condition',3,3);
INSERT INTO trail_subject VALUES('condition',4,3);
INSERT INTO trail_subject VALUES('condition',5,3);
INSERT INTO trail_subject VALUES('condition',6,3);
INSERT INTO trail_subject VALUES('condition',7,3);
INSERT INTO trail_subject VALUES('condition',8,3);
INSERT INTO trail_subject VALUES('condition',9,3);
INSERT INTO trail_subject VALUES('formulation',1,17);
INSERT INTO trail_subject VALUES('formulation',1,21);
INSERT INTO trail_subject VALUES('formulation',1,22);
INSERT INTO trail_subject VALUES('formulation',1,23);
INSERT INTO trail_subject VALUES('formulation_version',1,21);
INSERT INTO trail_subject VALUES('formulation_version',1,22);
INSERT INTO trail_subject VALUES('formulation_version',1,23);
INSERT INTO trail_subject VALUES('formulation_version',1,38);
INSERT INTO trail_subject VALUES('investigation',1,56);
INSERT INTO trail_subject VALUES('lot',1,38);
INSERT INTO trail_subject VALUES('lot',1,39);
INSERT INTO trail_subject VALUES('lot',1,40);
INSERT INTO trail_subject VALUES('lot',1,41);
INSERT INTO trail_subject VALUES('lot',1,42);
INSERT INTO trail_subject VALUES('lot',1,43);
INSERT INTO trail_subject VALUES('lot',1,44);
INSERT INTO trail_subject VALUES('lot',1,45);
INSERT INTO trail_subject VALUES('lot',1,47);
INSERT INTO trail_subject VALUES('lot',1,48);
INSERT INTO trail_subject VALUES('lot',1,50);
INSERT INTO trail_subject VALUES('lot',1,51);
INSERT INTO trail_subject VALUES('lot',1,52);
INSERT INTO trail_subject VALUES('lot',1,53);
INSERT INTO trail_subject VALUES('lot',1,54);
INSERT INTO trail_subject VALUES('lot',1,55);
INSERT INTO trail_subject VALUES('lot',1,56);
INSERT INTO trail_subject VALUES('lot',1,57);
INSERT INTO trail_subject VALUES('lot',1,71);
INSERT INTO trail_subject VALUES('lot',1,72);
INSERT INTO trail_subject VALUES('lot',1,73);
INSERT INTO trail_subject VALUES('lot',1,74);
INSERT INTO trail_subject VALUES('lot',1,75);
INSERT INTO trail_subject VALUES('lot',1,76);
INSERT INTO trail_subject VALUES('material',1,18);
INSERT INTO trail_subject VALUES('material',2,19);
INSERT INTO trail_subject VALUES('material',3,20);
INSERT INTO trail_subject VALUES('method',1,24);
INSERT INTO trail_subject VALUES('method',1,25);
INSERT INTO trail_subject VALUES('method',1,26);
INSERT INTO trail_subject VALUES('method',2,27);
INSERT INTO trail_subject VALUES('method',2,28);
INSERT INTO trail_subject VALUES('method',2,29);
INSERT INTO trail_subject VALUES('method_version',1,24);
INSERT INTO trail_subject VALUES('method_version',1,25);
INSERT INTO trail_subject VALUES('method_version',1,26);
INSERT INTO trail_subject VALUES('method_version',1,33);
INSERT INTO trail_subject VALUES('method_version',1,35);
INSERT INTO trail_subject VALUES('method_version',2,27);
INSERT INTO trail_subject VALUES('method_version',2,28);
INSERT INTO trail_subject VALUES('method_version',2,29);
INSERT INTO trail_subject VALUES('method_version',2,34);
INSERT INTO trail_subject VALUES('method_version',2,36);
INSERT INTO trail_subject VALUES('presentation',1,16);
INSERT INTO trail_subject VALUES('presentation',1,30);
INSERT INTO trail_subject VALUES('presentation',1,37);
INSERT INTO trail_subject VALUES('presentation',1,38);
INSERT INTO trail_subject VALUES('presentation',1,67);
INSERT INTO trail_subject VALUES('product',1,15);
INSERT INTO trail_subject VALUES('product',1,16);
INSERT INTO trail_subject VALUES('product',1,17);
INSERT INTO trail_subject VALUES('protocol',1,67);
INSERT INTO trail_subject VALUES('protocol',1,68);
INSERT INTO trail_subject VALUES('protocol',1,69);
INSERT INTO trail_subject VALUES('protocol',1,70);
INSERT INTO trail_subject VALUES('protocol_version',1,67);
INSERT INTO trail_subject VALUES('protocol_version',1,68);
INSERT INTO trail_subject VALUES('protocol_version',1,69);
INSERT INTO trail_subject VALUES('protocol_version',1,70);
INSERT INTO trail_subject VALUES('protocol_version',1,71);
INSERT INTO trail_subject VALUES('pull',1,72);
INSERT INTO trail_subject VALUES('pull',1,73);
INSERT INTO trail_subject VALUES('pull',1,74);
INSERT INTO trail_subject VALUES('pull',1,75);
INSERT INTO trail_subject VALUES('pull',1,76);
INSERT INTO trail_subject VALUES('sample',1,39);
INSERT INTO trail_subject VALUES('sample',1,40);
INSERT INTO trail_subject VALUES('sample',1,41);
INSERT INTO trail_subject VALUES('sample',1,42);
INSERT INTO trail_subject VALUES('sample',1,43);
INSERT INTO trail_subject VALUES('sample',1,44);
INSERT INTO trail_subject VALUES('sample',1,45);
INSERT INTO trail_subject VALUES('sample',1,47);
INSERT INTO trail_subject VALUES('sample',1,48);
INSERT INTO trail_subject VALUES('sample',1,50);
INSERT INTO trail_subject VALUES('sample',1,51);
INSERT INTO trail_subject VALUES('sample',2,53);
INSERT INTO trail_subject VALUES('sample',2,54);
INSERT INTO trail_subject VALUES('sample',2,55);
INSERT INTO trail_subject VALUES('sample',2,56);
INSERT INTO trail_subject VALUES('sample',2,57);
INSERT INTO trail_subject VALUES('sample',3,72);
INSERT INTO trail_subject VALUES('sample',3,73);
INSERT INTO trail_subject VALUES('sample',3,74);
INSERT INTO trail_subject VALUES('sample',3,75);
INSERT INTO trail_subject VALUES('sample',3,76);
INSERT INTO trail_subject VALUES('shelf_life_assignment',1,37);
INSERT INTO trail_subject VALUES('site',1,2);
INSERT INTO trail_subject VALUES('specification',1,30);
INSERT INTO trail_subject VALUES('specification',1,31);
INSERT INTO trail_subject VALUES('specification',1,32);
INSERT INTO trail_subject VALUES('specification_version',1,30);
INSERT INTO trail_subject VALUES('specification_version',1,31);
INSERT INTO trail_subject VALUES('specification_version',1,32);
INSERT INTO trail_subject VALUES('study',1,71);
INSERT INTO trail_subject VALUES('study',1,72);
INSERT INTO trail_subject VALUES('study',1,73);
INSERT INTO trail_subject VALUES('study',1,74);
INSERT INTO trail_subject VALUES('study',1,75);
INSERT INTO trail_subject VALUES('study',1,76);
CREATE TABLE site (
    id integer primary key check (id = 1),
    uuid blob not null,
    name text not null,
    zone text not null,
    is_demo integer not null check (is_demo in (0, 1)),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO site VALUES(1,X'01a232674782710aa09e22535999e348','Tarnwick Suspension Works','Europe/London',1,2);
CREATE TABLE setting (
    id integer primary key,
    name text not null,
    value text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
CREATE TABLE account (
    id integer primary key,
    user_name text not null collate nocase unique,
    full_name text not null,
    kind text not null check (kind in ('person', 'system')),
    identity_verified_by text,              -- who saw proof of identity (11.100)
    password_hash text,                     -- PHC string; null until the person has set one
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO account VALUES(1,'console','The console','system',NULL,NULL,1);
INSERT INTO account VALUES(2,'clock','The clock','system',NULL,NULL,1);
INSERT INTO account VALUES(3,'nell.farrow','Nell Farrow','person','invented person','$argon2id$v=19$m=64,t=1,p=1$Cio+YCyj7QEdBTmWwGnG/A$zl8Q1CqUoEYmg8JADaz2JnsoiFAlHJWsMj7o0BMwsm8',4);
INSERT INTO account VALUES(4,'tomas.reyle','Tomas Reyle','person','invented person','$argon2id$v=19$m=64,t=1,p=1$nIRhUKhifcjv1oXUy1tVIw$ijxmo49H0Oy55AhhePYV5gBdNyExiytRl3mW9dHRfF8',5);
INSERT INTO account VALUES(5,'bea.skelton','Bea Skelton','person','invented person','$argon2id$v=19$m=64,t=1,p=1$lMIeNW8h4SV+Vx/r5mkkxQ$GnYn8xj59DmM0ZAMd/DuCFhOXp1EEkkJz83MD/pO7DE',6);
INSERT INTO account VALUES(6,'rafe.tolland','Rafe Tolland','person','invented person','$argon2id$v=19$m=64,t=1,p=1$7VI31SiKE85TbdpTHjJQYA$Xz1JRJQx/Zwr/2XABr/v0xiWVP1uAssynB67gr1MvoU',7);
INSERT INTO account VALUES(7,'ilse.brandt','Ilse Brandt','person','invented person','$argon2id$v=19$m=64,t=1,p=1$51cZeuPArhHMS8hSYm8tqw$QqV9GfP1Ev9Cxza24JyOev4AX7GlT9V20WLAxeEz6Go',8);
INSERT INTO account VALUES(8,'maren.oddy','Maren Oddy','person','invented person','$argon2id$v=19$m=64,t=1,p=1$JNVowGkCpPe/GAbs4eT7Rg$gDxjvCy9KRxxcSeRRp/bfi+uMh3qBlINzRC4p7t2b10',9);
INSERT INTO account VALUES(9,'otis.vane','Otis Vane','person','invented person','$argon2id$v=19$m=64,t=1,p=1$4J5Rr2u6kENmABZ7ONAwsw$yVKK8tAy2qTyK5hA+AY3MyeYMTMDlWmIxvnkjWnvv5Q',10);
INSERT INTO account VALUES(10,'ada.whitlock','Ada Whitlock','person','invented person','$argon2id$v=19$m=64,t=1,p=1$lx08HHP214CwMXDSbjX5fw$RPuJUHsWnpO2Di9Liq9C+SGuWFaPXT+X6lBekpADZNE',11);
INSERT INTO account VALUES(11,'per.lindqvist','Per Lindqvist','person','invented person','$argon2id$v=19$m=64,t=1,p=1$q0s5dURcra7Db3BpaGxyiA$/i8vkOkwPr8x7n1dJws2tJduZMMhJCJnpgzHXvteyS0',12);
INSERT INTO account VALUES(12,'ines.caro','Ines Caro','person','invented person','$argon2id$v=19$m=64,t=1,p=1$4Qv4zBQS+ZsJX0JcsPFygA$YKGX5GrxN8u7P1EhONCnPFJO6MvAeQwO1WbUBA6+pu0',13);
INSERT INTO account VALUES(13,'lena.marsh','Lena Marsh','person','invented person','$argon2id$v=19$m=64,t=1,p=1$PhYGUZb6FvyGhV9s3OdVjQ$IyuksbCCNG0YUkYJoxK42ABS1+7Q4SI2fM86QQRYCB8',14);
CREATE TABLE account_roles (
    id integer primary key,
    account integer not null references account (id),
    roles text not null,                    -- comma-separated codes
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO account_roles VALUES(1,3,'administrator',4);
INSERT INTO account_roles VALUES(2,4,'formulator',5);
INSERT INTO account_roles VALUES(3,5,'production operator',6);
INSERT INTO account_roles VALUES(4,6,'analyst',7);
INSERT INTO account_roles VALUES(5,7,'analyst',8);
INSERT INTO account_roles VALUES(6,8,'lab manager',9);
INSERT INTO account_roles VALUES(7,9,'lab manager',10);
INSERT INTO account_roles VALUES(8,10,'QA reviewer',11);
INSERT INTO account_roles VALUES(9,11,'QA reviewer',12);
INSERT INTO account_roles VALUES(10,12,'auditor',13);
INSERT INTO account_roles VALUES(11,13,'formulator',14);
CREATE TABLE account_state (
    id integer primary key,
    account integer not null references account (id),
    state text not null check (state in ('enabled', 'disabled')),
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
CREATE TABLE session (
    token_digest text primary key,
    account integer not null references account (id),
    started_at text not null,
    last_seen text not null,
    ended_at text,
    address text,
    agent text
) strict, without rowid;
INSERT INTO session VALUES('203d35c0651e9ee98f82c1407120e5a331e5c5a9feeee499a178325fa25778b3',7,'2026-12-03T09:00:00.000Z','2026-12-03T09:00:00.000Z',NULL,NULL,NULL);
INSERT INTO session VALUES('70ede8cb82eb8b8c0559dcfeabdb3b35c6bfb44c33ee72d845cb33e7ba063cf1',10,'2026-12-03T09:00:00.000Z','2026-12-03T09:00:00.000Z',NULL,NULL,NULL);
CREATE TABLE sign_in_counter (
    key text primary key,
    failures integer not null,
    last_at text not null,
    wait_until text
) strict, without rowid;
CREATE TABLE submission_key (
    key text primary key,
    account integer not null,
    content_digest text not null,
    act integer not null,
    location text,
    at text not null
) strict, without rowid;
INSERT INTO submission_key VALUES('20f4c5c6bfefafbac12cf26f52b75f1198bf807c24c4d07388b9eb41a808dfc6',10,'1fe36993c1472ddf3bf30cbe44fbbe5402eb0b1524e85683d279a0b79e268d01',51,'/review/receipts/51','2026-12-03T09:00:00.000Z');
INSERT INTO submission_key VALUES('45a662d63161e5a9c5d6b60fd7ba279f10008f2f8588c5907ce83671196a2e68',10,'bcb8e7fbe808c6284847809f5c3cd21d3ad967ec0d2ab24dd4387e0263816696',50,'/review','2026-12-03T09:00:00.000Z');
INSERT INTO submission_key VALUES('6dfee538a382a9f05128c924a4efebb9dc42cbb147e89992ac478e5442b02c77',7,'5cde6391ccbebffe1bfc8b62c2dfd58b9ef23ea25c097a40102acdadc89ae90c',48,'/checks','2026-12-03T09:00:00.000Z');
INSERT INTO submission_key VALUES('71c44c1ead0af6fbf6485c4eb53ba041f65d3e7fecd93025aaa400c60b36fa8e',10,'9435868a768a66894d4d8a0db521cd551372ba52b9aa98b0a5996a34a3ea0712',52,'/lots/1/decision','2026-12-03T09:00:00.000Z');
INSERT INTO submission_key VALUES('bf929943f01c8b48110bc6e435326a6e3cb5b9a3971641a3945c1d2f2c696df5',7,'bf1c32084d5fcf407b71a5eb9fb3252a8109f53eccf541bf1c9b99422e86df54',57,'/checks','2026-12-03T09:00:00.000Z');
INSERT INTO submission_key VALUES('ed2f58d4c807bff95eb3b6da272ce936a61eced7d7db92de1f14db7224b32ce0',7,'a5758ff1359898503bd66a8427824ae28b0281aeed16091c9823e4ce8d1291e9',47,'/checks','2026-12-03T09:00:00.000Z');
CREATE TABLE draft (
    account integer not null,
    page text not null,
    number integer not null,
    content text not null,
    at text not null,
    primary key (account, page)
) strict, without rowid;
CREATE TABLE reading_log (
    id integer primary key,
    account integer not null,
    path text not null,
    at text not null
) strict;
CREATE TABLE counter (
    name text primary key,
    value integer not null
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
INSERT INTO signature VALUES(1,'formulation_version',1,'authorship',4,'Tomas Reyle','eeaf126d8a7ea996493b66c3670c49fa7f87e4e1f461fc940d4fc84957fb101c',NULL,22);
INSERT INTO signature VALUES(2,'formulation_version',1,'approval',10,'Ada Whitlock','eeaf126d8a7ea996493b66c3670c49fa7f87e4e1f461fc940d4fc84957fb101c',NULL,23);
INSERT INTO signature VALUES(3,'method_version',1,'authorship',8,'Maren Oddy','dd7c2ac1861ee6b4b07bc66312713b47227ac15b4fe5afcc4e0b4743e78548e2',NULL,25);
INSERT INTO signature VALUES(4,'method_version',1,'approval',9,'Otis Vane','dd7c2ac1861ee6b4b07bc66312713b47227ac15b4fe5afcc4e0b4743e78548e2',NULL,26);
INSERT INTO signature VALUES(5,'method_version',2,'authorship',8,'Maren Oddy','6e15eaa9f6c3af7c74cabb0c7ea9796a84934f1dd0bdf848337e9c5f9e4fdb28',NULL,28);
INSERT INTO signature VALUES(6,'method_version',2,'approval',9,'Otis Vane','6e15eaa9f6c3af7c74cabb0c7ea9796a84934f1dd0bdf848337e9c5f9e4fdb28',NULL,29);
INSERT INTO signature VALUES(7,'specification_version',1,'authorship',8,'Maren Oddy','5c6753a60bb7cf9920fcde4b0468d934e2a832e19c1b78c52093efdd840a714b',NULL,31);
INSERT INTO signature VALUES(8,'specification_version',1,'approval',10,'Ada Whitlock','5c6753a60bb7cf9920fcde4b0468d934e2a832e19c1b78c52093efdd840a714b',NULL,32);
INSERT INTO signature VALUES(9,'shelf_life_assignment',1,'approval',10,'Ada Whitlock','50aa4947cd25847b6d52268e217eedbc7a9c6b5a624fb5d4be318fd23987f6fa',NULL,37);
INSERT INTO signature VALUES(10,'sample',1,'review',10,'Ada Whitlock','1dcf17d7136012cbc5479b2e98453a7810c619fb706c65acb32fa37afe38a95c',NULL,51);
INSERT INTO signature VALUES(11,'lot',1,'release',10,'Ada Whitlock','b90ea992f76558c688e4aaa70acc190053550fd9648f70cdf10c653bfbcb00a7',NULL,52);
INSERT INTO signature VALUES(12,'protocol_version',1,'authorship',8,'Maren Oddy','d582d7821ffc255f9fe0a7addcb0dd9cecb52a884b412915ea950eb4a00258e6',NULL,69);
INSERT INTO signature VALUES(13,'protocol_version',1,'approval',10,'Ada Whitlock','d582d7821ffc255f9fe0a7addcb0dd9cecb52a884b412915ea950eb4a00258e6',NULL,70);
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
CREATE TABLE customer (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
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
INSERT INTO product VALUES(1,X'01a23267479473468ab42f61d3ae9759','TW','Antacid oral suspension','oral suspension',NULL,NULL,15);
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
INSERT INTO presentation VALUES(1,X'01a23267479473468ab42f62c6f65a0d',1,'TW-104','400 mg/5 mL','200 mL amber PET bottle','bottle','200','United Kingdom','semi-permeable',16);
CREATE TABLE material (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    function text not null,
    density_g_per_ml text,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO material VALUES(1,X'01a23267479473468ab42f646b5fa7b4','M-1-1','magnesium hydroxide','active',NULL,18);
INSERT INTO material VALUES(2,X'01a23267479570c3b416ec0a5aa2bada','M-1-2','xanthan gum','suspending agent',NULL,19);
INSERT INTO material VALUES(3,X'01a23267479570c3b416ec0b572158f4','M-1-3','purified water','vehicle',NULL,20);
CREATE TABLE formulation (
    id integer primary key,
    uuid blob not null unique,
    product integer not null references product (id),
    code text not null collate nocase unique,
    name text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO formulation VALUES(1,X'01a23267479473468ab42f63554aa603',1,'F-1','Xanthan and cellulose',17);
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
INSERT INTO formulation_version VALUES(1,X'01a23267479570c3b416ec0cd3febd20',1,1,'first version of the recipe','{"dosage_form":"oral suspension","intended_state":"flocculated","ingredients":[{"material":1,"material_code":"M-1-1","name":"magnesium hydroxide","function":"active","quantity":"8.00","unit":"g","is_quantity_sufficient":false},{"material":2,"material_code":"M-1-2","name":"xanthan gum","function":"suspending agent","quantity":"0.40","unit":"g","is_quantity_sufficient":false},{"material":3,"material_code":"M-1-3","name":"purified water","function":"vehicle","quantity":"0","unit":"mL","is_quantity_sufficient":true}],"quantity_basis":"100 mL","target_total":"100","physical":{"solids_density_g_per_ml":null,"particle_size_d50_um":null,"vehicle_density_g_per_ml":null,"vehicle_low_shear_viscosity_mpa_s":null}}',NULL,21);
CREATE TABLE method (
    id integer primary key,
    uuid blob not null unique,
    code text not null collate nocase unique,
    name text not null,
    kind text not null,                     -- appearance, redispersibility, ph, viscosity, sedimentation, sediment, numeric
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO method VALUES(1,X'01a232674796749e8a574cb04a8929d5','AS-01','Assay','numeric',24);
INSERT INTO method VALUES(2,X'01a23267479872629eff6942bff4f97b','DE-01','Density','numeric',27);
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
INSERT INTO method_version VALUES(1,X'01a232674796749e8a574cb1c6b02f36',1,1,'first version','{"stage":"after-redispersion","unit":"%","reading_decimals":1,"rounding":{"halves":"away-from-zero","to":{"decimals":1}},"replicates":2,"level":"reading","reportable":{"mean":{"range_at_most":"20","rsd_percent_at_most":null}},"possible_least":"0","possible_most":"1000000","repeatability":null,"needs_check":true,"second_reader_tolerance":null,"hides_limits":false,"is_repeatable_on_container":true,"containers_needed":1,"ml_needed":null,"needs_unopened":false,"may_share_after":true,"test_within_days":3,"hands_on_minutes":15,"instruments":[],"settings":{"numeric":{"inputs":[],"formula":null,"components":[],"has_total":false}}}',NULL,24);
INSERT INTO method_version VALUES(2,X'01a23267479872629eff69436aaefd48',2,1,'first version','{"stage":"after-redispersion","unit":"g/mL","reading_decimals":2,"rounding":{"halves":"away-from-zero","to":{"decimals":2}},"replicates":2,"level":"reading","reportable":{"mean":{"range_at_most":"20","rsd_percent_at_most":null}},"possible_least":"0","possible_most":"1000000","repeatability":null,"needs_check":true,"second_reader_tolerance":null,"hides_limits":false,"is_repeatable_on_container":true,"containers_needed":1,"ml_needed":null,"needs_unopened":false,"may_share_after":true,"test_within_days":3,"hands_on_minutes":15,"instruments":[],"settings":{"numeric":{"inputs":[],"formula":null,"components":[],"has_total":false}}}',NULL,27);
CREATE TABLE specification (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO specification VALUES(1,X'01a232674799738fa0fccf633e2be1de',1,'SP-104',30);
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
INSERT INTO specification_version VALUES(1,X'01a232674799738fa0fccf646d9a77d0',1,1,'first version','{"tests":[{"test":"assay","title":"Assay","method":1,"unit":"%","release":{"between":{"lower":"97.0","upper":"103.0"}},"shelf_life":{"between":{"lower":"95.0","upper":"105.0"}},"in_use":{"between":{"lower":null,"upper":null}},"way":"rounding"},{"test":"density","title":"Density","method":2,"unit":"g/mL","release":{"between":{"lower":"1.00","upper":"1.20"}},"shelf_life":{"between":{"lower":"1.00","upper":"1.20"}},"in_use":{"between":{"lower":null,"upper":null}},"way":"rounding"}]}',NULL,30);
CREATE TABLE protocol (
    id integer primary key,
    uuid blob not null unique,
    presentation integer not null references presentation (id),
    code text not null collate nocase unique,
    title text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO protocol VALUES(1,X'01a2326747cf71148e75613a18a63698',1,'SP-104','Ongoing stability',67);
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
INSERT INTO protocol_version VALUES(1,X'01a2326747cf71148e75613b61836b6a',1,1,'first version','{"programme":"development","specification_version":1,"arms":[{"condition":1,"orientation":"upright","limits_do":"out-of-specification","is_labelled_condition":true,"is_contingent":false,"ages":[{"age":{"months":0},"tests":["assay","density"],"window":null},{"age":{"months":3},"tests":["assay","density"],"window":null},{"age":{"months":6},"tests":["assay","density"],"window":null},{"age":{"months":9},"tests":["assay","density"],"window":null}]}],"tests":[{"test":"assay","title":"Assay","method_version":1,"is_information":false},{"test":"density","title":"Density","method_version":2,"is_information":false}],"spare_containers":2,"retain_containers":1,"why_no_intermediate":"development lots are kept at one condition","worst_orientation":null}',NULL,67);
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
INSERT INTO shelf_life_assignment VALUES(1,1,'United Kingdom','Do not store above 25 °C',24,NULL,'tentative','protocol PR-104 and report RP-7','2026-12-01','month',37);
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
CREATE TABLE qualification (
    id integer primary key,
    account integer not null references account (id),
    method_version integer not null references method_version (id),
    starts_on text not null,
    ends_on text not null,
    reference text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO qualification VALUES(1,6,1,'2026-01-01','2029-12-05','training record 12',33);
INSERT INTO qualification VALUES(2,6,2,'2026-01-01','2029-12-05','training record 12',34);
INSERT INTO qualification VALUES(3,7,1,'2026-01-01','2029-12-05','training record 12',35);
INSERT INTO qualification VALUES(4,7,2,'2026-01-01','2029-12-05','training record 12',36);
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
CREATE TABLE import (
    id integer primary key,
    uuid blob not null unique,
    file_name text not null,
    sha256 text not null unique,
    row_count integer not null,
    result_count integer not null,
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
INSERT INTO lot VALUES(1,X'01a23267479b702981126ead938ef8ca','TW-104-0640',1,1,'90ba10535447ab5d73077e3605a2673a24bf5afc5b7fbab3d8fcdc4e1a3c1235','2026-12-02',NULL,NULL,'production','PET bottle, PP cap',NULL,NULL,38);
CREATE TABLE lot_distribution (
    id integer primary key,
    lot integer not null references lot (id),
    first_on text not null,
    markets text not null,
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
INSERT INTO lot_decision VALUES(1,1,'released','2026-12-03',1,'2028-11-30',11,52);
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
INSERT INTO condition VALUES(1,'25/60','25 °C/60 % RH','25','2','60','5','within','long-term',12,'ICH Q1A(R2) 2.2.7.1, general case',1,3);
INSERT INTO condition VALUES(2,'30/65','30 °C/65 % RH','30','2','65','5','within','long-term or intermediate',6,'ICH Q1A(R2) 2.2.7.1, general case',1,3);
INSERT INTO condition VALUES(3,'40/75','40 °C/75 % RH','40','2','75','5','within','accelerated',6,'ICH Q1A(R2) 2.2.7.1, general case',1,3);
INSERT INTO condition VALUES(4,'25/40','25 °C/40 % RH','25','2','40','5','within','long-term',12,'ICH Q1A(R2) 2.2.7.3, semi-permeable container',1,3);
INSERT INTO condition VALUES(5,'30/35','30 °C/35 % RH','30','2','35','5','within','long-term',12,'ICH Q1A(R2) 2.2.7.3, semi-permeable container',1,3);
INSERT INTO condition VALUES(6,'40/25','40 °C/at most 25 % RH','40','2','25',NULL,'not more than','accelerated',6,'ICH Q1A(R2) 2.2.7.3, semi-permeable container',1,3);
INSERT INTO condition VALUES(7,'5','5 °C','5','3',NULL,NULL,'none','long-term',12,'ICH Q1A(R2) 2.2.7.4, refrigerated',1,3);
INSERT INTO condition VALUES(8,'-20','−20 °C','-20','5',NULL,NULL,'none','long-term',12,'ICH Q1A(R2) 2.2.7.5, frozen',1,3);
INSERT INTO condition VALUES(9,'30/75','30 °C/75 % RH','30','2','75','5','within','long-term',12,'WHO TRS 1010 annex 10, zone IVb',1,3);
CREATE TABLE chamber (
    id integer primary key,
    code text not null collate nocase unique,
    name text not null,
    condition integer not null references condition (id),
    location text not null,
    qualification_due_on text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO chamber VALUES(1,'CH-25/60','Chamber at 25 °C/60 % RH',1,'cellar','2030-06-30',58);
INSERT INTO chamber VALUES(2,'CH-30/65','Chamber at 30 °C/65 % RH',2,'cellar','2030-06-30',59);
INSERT INTO chamber VALUES(3,'CH-40/75','Chamber at 40 °C/75 % RH',3,'cellar','2030-06-30',60);
INSERT INTO chamber VALUES(4,'CH-25/40','Chamber at 25 °C/40 % RH',4,'cellar','2030-06-30',61);
INSERT INTO chamber VALUES(5,'CH-30/35','Chamber at 30 °C/35 % RH',5,'cellar','2030-06-30',62);
INSERT INTO chamber VALUES(6,'CH-40/25','Chamber at 40 °C/at most 25 % RH',6,'cellar','2030-06-30',63);
INSERT INTO chamber VALUES(7,'CH-5','Chamber at 5 °C',7,'cellar','2030-06-30',64);
INSERT INTO chamber VALUES(8,'CH--20','Chamber at −20 °C',8,'cellar','2030-06-30',65);
INSERT INTO chamber VALUES(9,'CH-30/75','Chamber at 30 °C/75 % RH',9,'cellar','2030-06-30',66);
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
INSERT INTO study VALUES(1,X'01a2326747d37177a4925bc45c8afded','ST-001',1,1,1,'development','2026-12-03','ICH Q1A(R2) and Q1E, WHO TRS 1010 annex 10; windows of 2026',NULL,71);
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
INSERT INTO study_arm VALUES(1,1,1,1,'upright',1,'OOS',1,0,NULL,71);
CREATE TABLE arm_trigger (
    id integer primary key,
    study_arm integer not null references study_arm (id),
    why text not null,
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
INSERT INTO container VALUES(1,1,1,'ST-001-A01-HLRQ','pull',71);
INSERT INTO container VALUES(2,1,2,'ST-001-A02-WS22','pull',71);
INSERT INTO container VALUES(3,1,3,'ST-001-A03-X8ZX','pull',71);
INSERT INTO container VALUES(4,1,4,'ST-001-A04-TYJF','pull',71);
INSERT INTO container VALUES(5,1,5,'ST-001-A05-TWEM','spare',71);
INSERT INTO container VALUES(6,1,6,'ST-001-A06-TNCU','spare',71);
INSERT INTO container VALUES(7,1,7,'ST-001-A07-BQUP','retain',71);
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
INSERT INTO pull VALUES(1,X'01a2326747d37177a4925bc5e638b621',1,0,NULL,'Initial','2026-12-03','2026-12-03','2026-12-06',3,1,0,NULL,NULL,71);
INSERT INTO pull VALUES(2,X'01a2326747d37177a4925bc744a49e61',1,3,NULL,'3 months','2027-03-03','2027-03-03','2027-03-10',3,1,0,NULL,NULL,71);
INSERT INTO pull VALUES(3,X'01a2326747d473428f52f2b21f4bb864',1,6,NULL,'6 months','2027-06-03','2027-06-03','2027-06-10',3,1,0,NULL,NULL,71);
INSERT INTO pull VALUES(4,X'01a2326747d473428f52f2b409b2b4dc',1,9,NULL,'9 months','2027-09-03','2027-09-03','2027-09-10',3,1,1,NULL,NULL,71);
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
INSERT INTO pull_event VALUES(1,1,'pulled',NULL,'2026-12-03','scan','taken for this story',72);
CREATE TABLE pull_assignment (
    id integer primary key,
    pull integer not null references pull (id),
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
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
INSERT INTO container_event VALUES(1,1,'pulled',1,NULL,'taken for this story',72);
CREATE TABLE open_pull (
    pull integer primary key references pull (id),
    stage text not null check (stage in ('to take', 'in test')),
    due_on text not null,
    latest_on text not null,                -- the last day to take it, then the last day to test it
    minutes integer not null default 0,     -- at the bench, from the methods of its tests
    account integer references account (id) -- who has it
) strict;
INSERT INTO open_pull VALUES(1,'in test','2026-12-03','2026-12-06',30,NULL);
INSERT INTO open_pull VALUES(2,'to take','2027-03-03','2027-03-10',30,NULL);
INSERT INTO open_pull VALUES(3,'to take','2027-06-03','2027-06-10',30,NULL);
INSERT INTO open_pull VALUES(4,'to take','2027-09-03','2027-09-10',30,NULL);
CREATE TABLE open_day (
    stage text not null,
    due_on text not null,
    latest_on text not null,
    pulls integer not null,
    minutes integer not null,
    primary key (stage, due_on, latest_on)
) strict, without rowid;
INSERT INTO open_day VALUES('in test','2026-12-03','2026-12-06',1,30);
INSERT INTO open_day VALUES('to take','2027-03-03','2027-03-10',1,30);
INSERT INTO open_day VALUES('to take','2027-06-03','2027-06-10',1,30);
INSERT INTO open_day VALUES('to take','2027-09-03','2027-09-10',1,30);
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
INSERT INTO sample VALUES(1,X'01a23267479c70bb9eb71a3b4f3c8a83','TW-104-0640-R1','release',1,NULL,1,'release',2,'sealed, clean','Bea Skelton','2026-12-03',39);
INSERT INTO sample VALUES(2,X'01a2326747c5774c9e60f21b838453e8','TW-104-0640-T1','retain check',1,NULL,1,'shelf-life',2,'sealed, clean','Bea Skelton','2026-12-03',53);
INSERT INTO sample VALUES(3,X'01a2326747d37177a4925bc62c3702b2','ST-001-P01','stability pull',1,1,1,'shelf-life',NULL,NULL,NULL,NULL,71);
INSERT INTO sample VALUES(4,X'01a2326747d37177a4925bc860831b39','ST-001-P02','stability pull',1,2,1,'shelf-life',NULL,NULL,NULL,NULL,71);
INSERT INTO sample VALUES(5,X'01a2326747d473428f52f2b341d324f9','ST-001-P03','stability pull',1,3,1,'shelf-life',NULL,NULL,NULL,NULL,71);
INSERT INTO sample VALUES(6,X'01a2326747d473428f52f2b5983e23cd','ST-001-P04','stability pull',1,4,1,'shelf-life',NULL,NULL,NULL,NULL,71);
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
INSERT INTO sample_test VALUES(1,1,0,'assay','Assay',1,39);
INSERT INTO sample_test VALUES(2,1,1,'density','Density',2,39);
INSERT INTO sample_test VALUES(3,2,0,'assay','Assay',1,53);
INSERT INTO sample_test VALUES(4,3,1,'assay','Assay',1,71);
INSERT INTO sample_test VALUES(5,3,2,'density','Density',2,71);
INSERT INTO sample_test VALUES(6,4,1,'assay','Assay',1,71);
INSERT INTO sample_test VALUES(7,4,2,'density','Density',2,71);
INSERT INTO sample_test VALUES(8,5,1,'assay','Assay',1,71);
INSERT INTO sample_test VALUES(9,5,2,'density','Density',2,71);
INSERT INTO sample_test VALUES(10,6,1,'assay','Assay',1,71);
INSERT INTO sample_test VALUES(11,6,2,'density','Density',2,71);
CREATE TABLE stage_loss (
    id integer primary key,
    sample integer not null references sample (id),
    container integer references container (id),
    stage text not null check (stage in ('before disturbance', 'redispersion', 'after redispersion')),
    why text not null,
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
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
INSERT INTO reading VALUES(1,1,NULL,1,'value','99.6','99.6','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,40);
INSERT INTO reading VALUES(2,1,NULL,2,'value','100.2','100.2','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,41);
INSERT INTO reading VALUES(3,2,NULL,1,'value','1.11','1.11','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,43);
INSERT INTO reading VALUES(4,2,NULL,2,'value','1.12','1.12','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,44);
INSERT INTO reading VALUES(5,3,NULL,1,'value','107.6','107.6','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,54);
INSERT INTO reading VALUES(6,3,NULL,2,'value','108.2','108.2','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,55);
INSERT INTO reading VALUES(7,4,1,1,'value','99.1','99.1','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,73);
INSERT INTO reading VALUES(8,4,1,2,'value','99.6','99.6','=',NULL,NULL,NULL,NULL,NULL,NULL,NULL,74);
INSERT INTO reading VALUES(9,4,1,1,'value','99.4','99.4','=','2026-12-03T09:00:00.000Z',NULL,NULL,NULL,NULL,NULL,7,76);
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
INSERT INTO result VALUES(1,1,1,'','99.9','=','99.9','%','conforms','{"compared":"99.9","limit":"97.0 to 103.0","mean":"99.9","median":"99.9","n":2,"not_read":[],"range":"0.6","rounding":"1 decimal, halves away from zero","rsd_percent":"0.4247","rule":"mean of 2","values":[{"of":"reading 1","value":"99.6"},{"of":"reading 2","value":"100.2"}],"way":"rounded to the limit''s last place, then compared"}',NULL,NULL,NULL,NULL,42);
INSERT INTO result VALUES(2,2,1,'','1.115','=','1.12','g/mL','conforms','{"compared":"1.12","limit":"1.00 to 1.20","mean":"1.115","median":"1.115","n":2,"not_read":[],"range":"0.01","rounding":"2 decimals, halves away from zero","rsd_percent":"0.6342","rule":"mean of 2","values":[{"of":"reading 1","value":"1.11"},{"of":"reading 2","value":"1.12"}],"way":"rounded to the limit''s last place, then compared"}',NULL,NULL,NULL,NULL,45);
INSERT INTO result VALUES(3,3,1,'','107.9','=','107.9','%','out of specification','{"compared":"107.9","limit":"95.0 to 105.0","mean":"107.9","median":"107.9","n":2,"not_read":[],"range":"0.6","rounding":"1 decimal, halves away from zero","rsd_percent":"0.3932","rule":"mean of 2","values":[{"of":"reading 1","value":"107.6"},{"of":"reading 2","value":"108.2"}],"way":"rounded to the limit''s last place, then compared"}',NULL,NULL,NULL,NULL,56);
INSERT INTO result VALUES(4,4,1,'','99.35','=','99.4','%','conforms','{"compared":"99.4","limit":"95.0 to 105.0","mean":"99.35","median":"99.35","n":2,"not_read":[],"range":"0.5","rounding":"1 decimal, halves away from zero","rsd_percent":"0.3559","rule":"mean of 2","values":[{"of":"bottle ST-001-A01-HLRQ, reading 1","value":"99.1"},{"of":"bottle ST-001-A01-HLRQ, reading 2","value":"99.6"}],"way":"rounded to the limit''s last place, then compared"}',NULL,NULL,NULL,NULL,75);
INSERT INTO result VALUES(5,4,2,'','99.5','=','99.5','%','conforms','{"compared":"99.5","limit":"95.0 to 105.0","mean":"99.5","median":"99.5","n":2,"not_read":[],"range":"0.2","rounding":"1 decimal, halves away from zero","rsd_percent":"0.1421","rule":"mean of 2","values":[{"of":"bottle ST-001-A01-HLRQ, reading 2","value":"99.6"},{"of":"bottle ST-001-A01-HLRQ, reading 1","value":"99.4"}],"way":"rounded to the limit''s last place, then compared"}',NULL,NULL,NULL,NULL,76);
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
INSERT INTO flag VALUES(1,3,'out of specification','exception','107.9 %, above 105.0.','{"limit":"95.0 to 105.0","value":"107.9","way":"rounded to the limit''s last place, then compared"}',56);
INSERT INTO flag VALUES(2,4,'not evaluable','context','Trend not evaluable: needs three more ages.','{"verdict":"not evaluable","why":"needs three more ages"}',75);
INSERT INTO flag VALUES(3,5,'not evaluable','context','Trend not evaluable: needs three more ages.','{"verdict":"not evaluable","why":"needs three more ages"}',76);
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
INSERT INTO investigation VALUES(1,X'01a2326747c872aa99c7e09e1384344d',1,3,'2026-12-03T09:00:00.000Z',NULL,NULL,56);
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
CREATE TABLE result_check (
    id integer primary key,
    sample_test integer not null references sample_test (id),
    version integer not null,
    verdict text not null check (verdict in ('checked', 'sent back')),
    why text,
    account integer not null references account (id),
    act integer not null default (current_act()) references trail_act (id) deferrable initially deferred
) strict;
INSERT INTO result_check VALUES(1,1,1,'checked',NULL,7,47);
INSERT INTO result_check VALUES(2,2,1,'checked',NULL,7,48);
INSERT INTO result_check VALUES(3,3,1,'checked',NULL,7,57);
CREATE TABLE exception_answer (
    id integer primary key,
    sample integer not null references sample (id),
    flag integer references flag (id),
    about text not null,
    answer text not null,
    account integer not null references account (id),
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
INSERT INTO review_decision VALUES(1,1,'agree','1dcf17d7136012cbc5479b2e98453a7810c619fb706c65acb32fa37afe38a95c',NULL,10,50);
CREATE TABLE open_sample (
    sample integer primary key references sample (id)
) strict;
INSERT INTO open_sample VALUES(2);
INSERT INTO open_sample VALUES(3);
CREATE TABLE open_check (
    sample_test integer primary key references sample_test (id)
) strict;
INSERT INTO open_check VALUES(4);
CREATE INDEX trail_change_update on trail_change (record, row, act) where kind = 'update';
CREATE TRIGGER guard_trail_act_update before update on trail_act
when old.id is not current_act() or old.detail is not null
    or exists (select 1 from trail_seal where act = old.id)
    or (new.id, new.at, new.offset_minutes, new.zone, new.account, new.user_name, new.full_name, new.role, new.act,
        new.reason, new.session, new.address, new.outcome)
    is not (old.id, old.at, old.offset_minutes, old.zone, old.account, old.user_name, old.full_name, old.role, old.act,
        old.reason, old.session, old.address, old.outcome)
begin select raise(abort, 'the trail is never changed'); end;
CREATE TRIGGER guard_trail_act_delete before delete on trail_act
begin select raise(abort, 'the trail is never changed'); end;
CREATE TRIGGER guard_trail_change_update before update on trail_change
begin select raise(abort, 'the trail is never changed'); end;
CREATE TRIGGER guard_trail_change_delete before delete on trail_change
begin select raise(abort, 'the trail is never changed'); end;
CREATE TRIGGER guard_trail_seal_update before update on trail_seal
begin select raise(abort, 'the trail is never changed'); end;
CREATE TRIGGER guard_trail_seal_delete before delete on trail_seal
begin select raise(abort, 'the trail is never changed'); end;
CREATE INDEX setting_by_name on setting (name, id);
CREATE INDEX account_roles_by_account on account_roles (account, id);
CREATE INDEX account_state_by_account on account_state (account, id);
CREATE INDEX session_by_account on session (account);
CREATE INDEX signature_by_subject on signature (kind, subject, meaning);
CREATE TRIGGER guard_signature_system before insert on signature
when (select kind from account where id = new.account) <> 'person'
begin select raise(abort, 'a system account cannot sign'); end;
CREATE INDEX attachment_by_subject on attachment (kind, subject);
CREATE INDEX photo_mark_by_attachment on photo_mark (attachment);
CREATE INDEX presentation_by_product on presentation (product);
CREATE INDEX specification_by_presentation on specification (presentation);
CREATE TRIGGER guard_formulation_version before update on formulation_version
when exists (select 1 from signature where kind = 'formulation_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
CREATE TRIGGER guard_method_version before update on method_version
when exists (select 1 from signature where kind = 'method_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
CREATE TRIGGER guard_specification_version before update on specification_version
when exists (select 1 from signature where kind = 'specification_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
CREATE TRIGGER guard_protocol_version before update on protocol_version
when exists (select 1 from signature where kind = 'protocol_version' and subject = old.id)
begin select raise(abort, 'a signed version is frozen'); end;
CREATE TRIGGER guard_approval before insert on signature
when new.meaning = 'approval' and exists (
    select 1 from signature
    where kind = new.kind and subject = new.subject and meaning = 'authorship' and account = new.account)
begin select raise(abort, 'the approver is not an author'); end;
CREATE INDEX shelf_life_by_presentation on shelf_life_assignment (presentation, effective_from);
CREATE INDEX instrument_event_by_instrument on instrument_event (instrument, kind, id);
CREATE INDEX qualification_by_account on qualification (account, method_version);
CREATE INDEX stop_override_by_account on stop_override (account, method_version) where account is not null;
CREATE INDEX stop_override_by_instrument on stop_override (instrument) where instrument is not null;
CREATE INDEX lot_by_presentation on lot (presentation);
CREATE INDEX lot_by_bulk_lot on lot (bulk_lot) where bulk_lot is not null;
CREATE INDEX lot_distribution_by_lot on lot_distribution (lot);
CREATE INDEX lot_decision_by_lot on lot_decision (lot);
CREATE INDEX study_by_lot on study (lot);
CREATE INDEX study_amendment_by_study on study_amendment (study);
CREATE INDEX arm_trigger_by_arm on arm_trigger (study_arm);
CREATE INDEX pull_by_arm on pull (study_arm);
CREATE INDEX pull_by_due on pull (latest_on, due_on);
CREATE INDEX pull_event_by_pull on pull_event (pull);
CREATE INDEX pull_assignment_by_pull on pull_assignment (pull);
CREATE INDEX container_event_by_container on container_event (container);
CREATE INDEX container_event_by_pull on container_event (pull) where pull is not null;
CREATE TRIGGER guard_container_leaves_once before insert on container_event
when exists (select 1 from container_event
    where container = new.container and (new.kind <> 'destroyed' or kind = 'destroyed'))
begin select raise(abort, 'the container has left already'); end;
CREATE INDEX open_pull_by_latest on open_pull (stage, latest_on, pull, due_on);
CREATE INDEX open_pull_by_due on open_pull (stage, due_on, latest_on, minutes);
CREATE TRIGGER open_pull_planned after insert on pull
when new.imported is null and new.due_on is not null
begin
    insert into open_pull (pull, stage, due_on, latest_on)
    values (new.id, 'to take', new.due_on, coalesce(new.latest_on, new.due_on));
end;
CREATE TRIGGER open_pull_happened after insert on pull_event
begin
    delete from open_pull where pull = new.pull and new.kind <> 'pulled';
    update open_pull set stage = 'in test', latest_on = date(new.happened_on,
        (select coalesce(test_within_days, 0) || ' days' from pull where id = new.pull))
    where pull = new.pull;
end;
CREATE TRIGGER open_pull_assigned after insert on pull_assignment
begin
    update open_pull set account = new.account where pull = new.pull;
end;
CREATE INDEX open_pull_of_people on open_pull (stage, due_on, account, minutes) where account is not null;
CREATE TRIGGER open_day_more after insert on open_pull
begin
    insert or ignore into open_day (stage, due_on, latest_on, pulls, minutes)
    values (new.stage, new.due_on, new.latest_on, 0, 0);
    update open_day set pulls = pulls + 1, minutes = minutes + new.minutes
    where stage = new.stage and due_on = new.due_on and latest_on = new.latest_on;
end;
CREATE TRIGGER open_day_fewer after delete on open_pull
begin
    update open_day set pulls = pulls - 1, minutes = minutes - old.minutes
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on;
    delete from open_day
    where stage = old.stage and due_on = old.due_on and latest_on = old.latest_on and pulls = 0;
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
CREATE INDEX sample_by_lot on sample (lot);
CREATE INDEX sample_test_by_test on sample_test (test, sample);
CREATE INDEX stage_loss_by_sample on stage_loss (sample);
CREATE INDEX reading_by_test on reading (sample_test, replicate, field);
CREATE INDEX flag_by_result on flag (result);
CREATE INDEX investigation_by_result on investigation (result);
CREATE INDEX investigation_entry_by_investigation on investigation_entry (investigation);
CREATE INDEX result_check_by_test on result_check (sample_test);
CREATE TRIGGER guard_checker_is_not_reader before insert on result_check
when new.verdict = 'checked' and exists (
    select 1 from reading r join trail_act a on a.id = r.act
    where r.sample_test = new.sample_test and a.account = new.account)
begin select raise(abort, 'the checker is not a reader'); end;
CREATE INDEX exception_answer_by_sample on exception_answer (sample);
CREATE INDEX exception_answer_by_flag on exception_answer (flag) where flag is not null;
CREATE INDEX review_decision_by_sample on review_decision (sample);
CREATE TRIGGER guard_reviewer_is_not_performer before insert on signature
when new.kind = 'sample' and new.meaning = 'review' and (exists (
    select 1 from reading r join sample_test t on t.id = r.sample_test join trail_act a on a.id = r.act
    where t.sample = new.subject and a.account = new.account) or exists (
    select 1 from result_check c join sample_test t on t.id = c.sample_test
    where t.sample = new.subject and c.account = new.account and c.verdict = 'checked'))
begin select raise(abort, 'the reviewer is not a performer'); end;
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
CREATE TRIGGER open_pull_asked after insert on sample_test
begin
    update open_pull
    set minutes = minutes + coalesce((select json_extract(content, '$.hands_on_minutes')
        from method_version where id = new.method_version), 0)
    where pull = (select pull from sample where id = new.sample);
end;
CREATE TRIGGER open_sample_received after insert on sample
when new.pull is null
begin
    insert or ignore into open_sample (sample) values (new.id);
end;
CREATE TRIGGER open_sample_pulled after insert on pull_event
when new.kind = 'pulled'
begin
    insert or ignore into open_sample (sample)
    select s.id from pull p join sample s on s.pull = p.id where p.id = new.pull and p.imported is null;
end;
CREATE TRIGGER open_sample_result after insert on result
when new.imported is null
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
CREATE TRIGGER open_sample_check after insert on result_check
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
CREATE TRIGGER open_sample_reading after insert on reading
begin
    insert or ignore into open_sample (sample) select sample from sample_test where id = new.sample_test;
end;
CREATE TRIGGER open_sample_answer after insert on exception_answer
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;
CREATE TRIGGER open_sample_loss after insert on stage_loss
begin
    insert or ignore into open_sample (sample) values (new.sample);
end;
CREATE TRIGGER open_sample_signed after insert on signature
when new.kind = 'sample' and new.meaning = 'review'
begin
    delete from open_sample where sample = new.subject;
end;
CREATE TRIGGER open_check_asked after insert on result
when new.imported is null and (select json_extract(v.content, '$.needs_check')
    from sample_test t join method_version v on v.id = t.method_version where t.id = new.sample_test) = 1
begin
    insert or ignore into open_check (sample_test) values (new.sample_test);
end;
CREATE TRIGGER open_check_answered after insert on result_check
begin
    delete from open_check where sample_test = new.sample_test;
end;
CREATE TRIGGER trail_insert_account after insert on account begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'account', new.id, 'insert', row_digest('act', new.act, 'full_name', new.full_name, 'id', new.id, 'identity_verified_by', new.identity_verified_by, 'kind', new.kind, 'password_hash', new.password_hash, 'user_name', new.user_name));
             end;
CREATE TRIGGER trail_delete_account before delete on account begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_account after update on account begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'account', new.id, 'update', row_digest('act', new.act, 'full_name', new.full_name, 'id', new.id, 'identity_verified_by', new.identity_verified_by, 'kind', new.kind, 'password_hash', new.password_hash, 'user_name', new.user_name),
                         changed_fields('act', old.act, new.act, 'full_name', old.full_name, new.full_name, 'id', old.id, new.id, 'identity_verified_by', old.identity_verified_by, new.identity_verified_by, 'kind', old.kind, new.kind, 'password_hash', old.password_hash, new.password_hash, 'user_name', old.user_name, new.user_name));
                 end;
CREATE TRIGGER trail_insert_account_code after insert on account_code begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'account_code', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'code_digest', new.code_digest, 'expires_at', new.expires_at, 'id', new.id, 'used_at', new.used_at));
             end;
CREATE TRIGGER trail_delete_account_code before delete on account_code begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_account_code after update on account_code begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'account_code', new.id, 'update', row_digest('account', new.account, 'act', new.act, 'code_digest', new.code_digest, 'expires_at', new.expires_at, 'id', new.id, 'used_at', new.used_at),
                         changed_fields('account', old.account, new.account, 'act', old.act, new.act, 'code_digest', old.code_digest, new.code_digest, 'expires_at', old.expires_at, new.expires_at, 'id', old.id, new.id, 'used_at', old.used_at, new.used_at));
                 end;
CREATE TRIGGER trail_insert_account_roles after insert on account_roles begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'account_roles', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'roles', new.roles));
             end;
CREATE TRIGGER trail_delete_account_roles before delete on account_roles begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_account_roles before update on account_roles begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_account_state after insert on account_state begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'account_state', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'state', new.state));
             end;
CREATE TRIGGER trail_delete_account_state before delete on account_state begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_account_state before update on account_state begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_arm_trigger after insert on arm_trigger begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'arm_trigger', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'study_arm', new.study_arm, 'why', new.why));
             end;
CREATE TRIGGER trail_delete_arm_trigger before delete on arm_trigger begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_arm_trigger before update on arm_trigger begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_attachment after insert on attachment begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'attachment', new.id, 'insert', row_digest('about', new.about, 'act', new.act, 'file_name', new.file_name, 'id', new.id, 'kind', new.kind, 'media_type', new.media_type, 'sha256', new.sha256, 'size_bytes', new.size_bytes, 'subject', new.subject, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_attachment before delete on attachment begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_attachment before update on attachment begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_chamber after insert on chamber begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'chamber', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'condition', new.condition, 'id', new.id, 'location', new.location, 'name', new.name, 'qualification_due_on', new.qualification_due_on));
             end;
CREATE TRIGGER trail_delete_chamber before delete on chamber begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_chamber before update on chamber begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_condition after insert on condition begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'condition', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'humidity_percent', new.humidity_percent, 'humidity_rule', new.humidity_rule, 'humidity_tolerance_percent', new.humidity_tolerance_percent, 'id', new.id, 'in_catalogue', new.in_catalogue, 'least_months', new.least_months, 'name', new.name, 'source', new.source, 'temperature_c', new.temperature_c, 'temperature_tolerance_c', new.temperature_tolerance_c, 'use', new.use));
             end;
CREATE TRIGGER trail_delete_condition before delete on condition begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_condition before update on condition begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_container after insert on container begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'container', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'label', new.label, 'number', new.number, 'purpose', new.purpose, 'study_arm', new.study_arm));
             end;
CREATE TRIGGER trail_delete_container before delete on container begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_container before update on container begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_container_event after insert on container_event begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'container_event', new.id, 'insert', row_digest('act', new.act, 'container', new.container, 'id', new.id, 'kind', new.kind, 'note', new.note, 'pull', new.pull, 'witness', new.witness));
             end;
CREATE TRIGGER trail_delete_container_event before delete on container_event begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_container_event before update on container_event begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_customer after insert on customer begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'customer', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'name', new.name, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_customer before delete on customer begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_customer before update on customer begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_exception_answer after insert on exception_answer begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'exception_answer', new.id, 'insert', row_digest('about', new.about, 'account', new.account, 'act', new.act, 'answer', new.answer, 'flag', new.flag, 'id', new.id, 'sample', new.sample));
             end;
CREATE TRIGGER trail_delete_exception_answer before delete on exception_answer begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_exception_answer before update on exception_answer begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_flag after insert on flag begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'flag', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'kind', new.kind, 'level', new.level, 'numbers', new.numbers, 'result', new.result, 'sentence', new.sentence));
             end;
CREATE TRIGGER trail_delete_flag before delete on flag begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_flag before update on flag begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_formulation after insert on formulation begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'formulation', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'name', new.name, 'product', new.product, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_formulation before delete on formulation begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_formulation before update on formulation begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_formulation_version after insert on formulation_version begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'formulation_version', new.id, 'insert', row_digest('act', new.act, 'content', new.content, 'formulation', new.formulation, 'id', new.id, 'imported', new.imported, 'number', new.number, 'reason', new.reason, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_formulation_version before delete on formulation_version begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_formulation_version after update on formulation_version begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'formulation_version', new.id, 'update', row_digest('act', new.act, 'content', new.content, 'formulation', new.formulation, 'id', new.id, 'imported', new.imported, 'number', new.number, 'reason', new.reason, 'uuid', new.uuid),
                         changed_fields('act', old.act, new.act, 'content', old.content, new.content, 'formulation', old.formulation, new.formulation, 'id', old.id, new.id, 'imported', old.imported, new.imported, 'number', old.number, new.number, 'reason', old.reason, new.reason, 'uuid', old.uuid, new.uuid));
                 end;
CREATE TRIGGER trail_insert_import after insert on import begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'import', new.id, 'insert', row_digest('act', new.act, 'file_name', new.file_name, 'id', new.id, 'result_count', new.result_count, 'row_count', new.row_count, 'sha256', new.sha256, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_import before delete on import begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_import before update on import begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_instrument after insert on instrument begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'instrument', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'kind', new.kind, 'name', new.name, 'needs_daily_check', new.needs_daily_check, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_instrument before delete on instrument begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_instrument before update on instrument begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_instrument_event after insert on instrument_event begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'instrument_event', new.id, 'insert', row_digest('act', new.act, 'detail', new.detail, 'due_on', new.due_on, 'id', new.id, 'instrument', new.instrument, 'kind', new.kind, 'performed_on', new.performed_on));
             end;
CREATE TRIGGER trail_delete_instrument_event before delete on instrument_event begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_instrument_event before update on instrument_event begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_investigation after insert on investigation begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'investigation', new.id, 'insert', row_digest('act', new.act, 'clock_due_on', new.clock_due_on, 'first_known_at', new.first_known_at, 'id', new.id, 'number', new.number, 'result', new.result, 'steered_by', new.steered_by, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_investigation before delete on investigation begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_investigation before update on investigation begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_investigation_entry after insert on investigation_entry begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'investigation_entry', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'investigation', new.investigation, 'kind', new.kind, 'other_lot', new.other_lot, 'signature', new.signature, 'text', new.text));
             end;
CREATE TRIGGER trail_delete_investigation_entry before delete on investigation_entry begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_investigation_entry before update on investigation_entry begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_lot after insert on lot begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'lot', new.id, 'insert', row_digest('act', new.act, 'bulk_lot', new.bulk_lot, 'container_closure', new.container_closure, 'formulation_digest', new.formulation_digest, 'formulation_version', new.formulation_version, 'id', new.id, 'imported', new.imported, 'made_on', new.made_on, 'number', new.number, 'presentation', new.presentation, 'scale', new.scale, 'size', new.size, 'size_unit', new.size_unit, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_lot before delete on lot begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_lot before update on lot begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_lot_decision after insert on lot_decision begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'lot_decision', new.id, 'insert', row_digest('act', new.act, 'decided_on', new.decided_on, 'decision', new.decision, 'expires_on', new.expires_on, 'id', new.id, 'lot', new.lot, 'shelf_life_assignment', new.shelf_life_assignment, 'signature', new.signature));
             end;
CREATE TRIGGER trail_delete_lot_decision before delete on lot_decision begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_lot_decision before update on lot_decision begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_lot_distribution after insert on lot_distribution begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'lot_distribution', new.id, 'insert', row_digest('act', new.act, 'first_on', new.first_on, 'id', new.id, 'lot', new.lot, 'markets', new.markets));
             end;
CREATE TRIGGER trail_delete_lot_distribution before delete on lot_distribution begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_lot_distribution before update on lot_distribution begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_material after insert on material begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'material', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'density_g_per_ml', new.density_g_per_ml, 'function', new.function, 'id', new.id, 'name', new.name, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_material before delete on material begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_material before update on material begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_method after insert on method begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'method', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'kind', new.kind, 'name', new.name, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_method before delete on method begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_method before update on method begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_method_version after insert on method_version begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'method_version', new.id, 'insert', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'method', new.method, 'number', new.number, 'reason', new.reason, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_method_version before delete on method_version begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_method_version after update on method_version begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'method_version', new.id, 'update', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'method', new.method, 'number', new.number, 'reason', new.reason, 'uuid', new.uuid),
                         changed_fields('act', old.act, new.act, 'content', old.content, new.content, 'id', old.id, new.id, 'imported', old.imported, new.imported, 'method', old.method, new.method, 'number', old.number, new.number, 'reason', old.reason, new.reason, 'uuid', old.uuid, new.uuid));
                 end;
CREATE TRIGGER trail_insert_photo_mark after insert on photo_mark begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'photo_mark', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'attachment', new.attachment, 'base_x', new.base_x, 'base_y', new.base_y, 'fill_line_x', new.fill_line_x, 'fill_line_y', new.fill_line_y, 'id', new.id, 'interface_x', new.interface_x, 'interface_y', new.interface_y, 'ratio', new.ratio));
             end;
CREATE TRIGGER trail_delete_photo_mark before delete on photo_mark begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_photo_mark before update on photo_mark begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_presentation after insert on presentation begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'presentation', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'container_word', new.container_word, 'fill_ml', new.fill_ml, 'id', new.id, 'market', new.market, 'pack', new.pack, 'permeability', new.permeability, 'product', new.product, 'strength', new.strength, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_presentation before delete on presentation begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_presentation before update on presentation begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_product after insert on product begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'product', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'customer', new.customer, 'dosage_form', new.dosage_form, 'id', new.id, 'imported', new.imported, 'name', new.name, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_product before delete on product begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_product before update on product begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_protocol after insert on protocol begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'protocol', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'presentation', new.presentation, 'title', new.title, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_protocol before delete on protocol begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_protocol before update on protocol begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_protocol_version after insert on protocol_version begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'protocol_version', new.id, 'insert', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'number', new.number, 'protocol', new.protocol, 'reason', new.reason, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_protocol_version before delete on protocol_version begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_protocol_version after update on protocol_version begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'protocol_version', new.id, 'update', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'number', new.number, 'protocol', new.protocol, 'reason', new.reason, 'uuid', new.uuid),
                         changed_fields('act', old.act, new.act, 'content', old.content, new.content, 'id', old.id, new.id, 'imported', old.imported, new.imported, 'number', old.number, new.number, 'protocol', old.protocol, new.protocol, 'reason', old.reason, new.reason, 'uuid', old.uuid, new.uuid));
                 end;
CREATE TRIGGER trail_insert_pull after insert on pull begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'pull', new.id, 'insert', row_digest('act', new.act, 'age_days', new.age_days, 'age_months', new.age_months, 'age_text', new.age_text, 'containers_needed', new.containers_needed, 'due_on', new.due_on, 'earliest_on', new.earliest_on, 'id', new.id, 'imported', new.imported, 'is_last', new.is_last, 'latest_on', new.latest_on, 'study_arm', new.study_arm, 'supersedes', new.supersedes, 'test_within_days', new.test_within_days, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_pull before delete on pull begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_pull before update on pull begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_pull_assignment after insert on pull_assignment begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'pull_assignment', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'pull', new.pull));
             end;
CREATE TRIGGER trail_delete_pull_assignment before delete on pull_assignment begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_pull_assignment before update on pull_assignment begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_pull_event after insert on pull_event begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'pull_event', new.id, 'insert', row_digest('act', new.act, 'happened_at', new.happened_at, 'happened_on', new.happened_on, 'id', new.id, 'identity_by', new.identity_by, 'kind', new.kind, 'note', new.note, 'pull', new.pull));
             end;
CREATE TRIGGER trail_delete_pull_event before delete on pull_event begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_pull_event before update on pull_event begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_qualification after insert on qualification begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'qualification', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'ends_on', new.ends_on, 'id', new.id, 'method_version', new.method_version, 'reference', new.reference, 'starts_on', new.starts_on));
             end;
CREATE TRIGGER trail_delete_qualification before delete on qualification begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_qualification before update on qualification begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_reading after insert on reading begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'reading', new.id, 'insert', row_digest('act', new.act, 'container', new.container, 'due_at', new.due_at, 'field', new.field, 'hint_answer', new.hint_answer, 'hints', new.hints, 'id', new.id, 'inspected_every', new.inspected_every, 'instrument', new.instrument, 'qualifier', new.qualifier, 'read_at', new.read_at, 'replicate', new.replicate, 'sample_test', new.sample_test, 'supersedes', new.supersedes, 'typed', new.typed, 'value', new.value));
             end;
CREATE TRIGGER trail_delete_reading before delete on reading begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_reading before update on reading begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_result after insert on result begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'result', new.id, 'insert', row_digest('act', new.act, 'component', new.component, 'detail', new.detail, 'id', new.id, 'import_line', new.import_line, 'imported', new.imported, 'n', new.n, 'qualifier', new.qualifier, 'sample_test', new.sample_test, 'sd', new.sd, 'shown', new.shown, 'unit', new.unit, 'value', new.value, 'verdict', new.verdict, 'version', new.version));
             end;
CREATE TRIGGER trail_delete_result before delete on result begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_result before update on result begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_result_check after insert on result_check begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'result_check', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'sample_test', new.sample_test, 'verdict', new.verdict, 'version', new.version, 'why', new.why));
             end;
CREATE TRIGGER trail_delete_result_check before delete on result_check begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_result_check before update on result_check begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_review_decision after insert on review_decision begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'review_decision', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'content_digest', new.content_digest, 'decision', new.decision, 'id', new.id, 'sample', new.sample, 'why', new.why));
             end;
CREATE TRIGGER trail_delete_review_decision before delete on review_decision begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_review_decision before update on review_decision begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_sample after insert on sample begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'sample', new.id, 'insert', row_digest('act', new.act, 'condition_on_receipt', new.condition_on_receipt, 'containers', new.containers, 'handed_over_by', new.handed_over_by, 'id', new.id, 'limit_set', new.limit_set, 'lot', new.lot, 'number', new.number, 'pull', new.pull, 'purpose', new.purpose, 'received_on', new.received_on, 'specification_version', new.specification_version, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_sample before delete on sample begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_sample before update on sample begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_sample_test after insert on sample_test begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'sample_test', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'method_version', new.method_version, 'position', new.position, 'sample', new.sample, 'test', new.test, 'title', new.title));
             end;
CREATE TRIGGER trail_delete_sample_test before delete on sample_test begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_sample_test before update on sample_test begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_setting after insert on setting begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'setting', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'name', new.name, 'value', new.value));
             end;
CREATE TRIGGER trail_delete_setting before delete on setting begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_setting before update on setting begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_shelf_life_assignment after insert on shelf_life_assignment begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'shelf_life_assignment', new.id, 'insert', row_digest('act', new.act, 'basis', new.basis, 'effective_from', new.effective_from, 'expiry_format', new.expiry_format, 'id', new.id, 'in_use_days', new.in_use_days, 'market', new.market, 'months', new.months, 'presentation', new.presentation, 'reference', new.reference, 'storage_statement', new.storage_statement));
             end;
CREATE TRIGGER trail_delete_shelf_life_assignment before delete on shelf_life_assignment begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_shelf_life_assignment before update on shelf_life_assignment begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_signature after insert on signature begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'signature', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'digest', new.digest, 'id', new.id, 'kind', new.kind, 'meaning', new.meaning, 'signer_name', new.signer_name, 'statement', new.statement, 'subject', new.subject));
             end;
CREATE TRIGGER trail_delete_signature before delete on signature begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_signature before update on signature begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_site after insert on site begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'site', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'is_demo', new.is_demo, 'name', new.name, 'uuid', new.uuid, 'zone', new.zone));
             end;
CREATE TRIGGER trail_delete_site before delete on site begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_site before update on site begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_specification after insert on specification begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'specification', new.id, 'insert', row_digest('act', new.act, 'code', new.code, 'id', new.id, 'presentation', new.presentation, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_specification before delete on specification begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_specification before update on specification begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_specification_version after insert on specification_version begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'specification_version', new.id, 'insert', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'number', new.number, 'reason', new.reason, 'specification', new.specification, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_specification_version before delete on specification_version begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_specification_version after update on specification_version begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), 'specification_version', new.id, 'update', row_digest('act', new.act, 'content', new.content, 'id', new.id, 'imported', new.imported, 'number', new.number, 'reason', new.reason, 'specification', new.specification, 'uuid', new.uuid),
                         changed_fields('act', old.act, new.act, 'content', old.content, new.content, 'id', old.id, new.id, 'imported', old.imported, new.imported, 'number', old.number, new.number, 'reason', old.reason, new.reason, 'specification', old.specification, new.specification, 'uuid', old.uuid, new.uuid));
                 end;
CREATE TRIGGER trail_insert_stage_loss after insert on stage_loss begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'stage_loss', new.id, 'insert', row_digest('act', new.act, 'container', new.container, 'id', new.id, 'sample', new.sample, 'stage', new.stage, 'why', new.why));
             end;
CREATE TRIGGER trail_delete_stage_loss before delete on stage_loss begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_stage_loss before update on stage_loss begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_stop_override after insert on stop_override begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'stop_override', new.id, 'insert', row_digest('account', new.account, 'act', new.act, 'id', new.id, 'instrument', new.instrument, 'method_version', new.method_version, 'signature', new.signature, 'stop', new.stop, 'valid_on', new.valid_on));
             end;
CREATE TRIGGER trail_delete_stop_override before delete on stop_override begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_stop_override before update on stop_override begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_study after insert on study begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'study', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'imported', new.imported, 'lot', new.lot, 'number', new.number, 'programme', new.programme, 'protocol_version', new.protocol_version, 'rule_set', new.rule_set, 'specification_version', new.specification_version, 'started_on', new.started_on, 'uuid', new.uuid));
             end;
CREATE TRIGGER trail_delete_study before delete on study begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_study before update on study begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_study_amendment after insert on study_amendment begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'study_amendment', new.id, 'insert', row_digest('act', new.act, 'id', new.id, 'protocol_version', new.protocol_version, 'specification_version', new.specification_version, 'study', new.study, 'why', new.why));
             end;
CREATE TRIGGER trail_delete_study_amendment before delete on study_amendment begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_study_amendment before update on study_amendment begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
CREATE TRIGGER trail_insert_study_arm after insert on study_arm begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), 'study_arm', new.id, 'insert', row_digest('act', new.act, 'chamber', new.chamber, 'condition', new.condition, 'container_text', new.container_text, 'id', new.id, 'is_contingent', new.is_contingent, 'is_labelled_condition', new.is_labelled_condition, 'limits_do', new.limits_do, 'orientation', new.orientation, 'position', new.position, 'study', new.study));
             end;
CREATE TRIGGER trail_delete_study_arm before delete on study_arm begin
                 select raise(abort, 'records are never deleted');
             end;
CREATE TRIGGER trail_update_study_arm before update on study_arm begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;
COMMIT;
