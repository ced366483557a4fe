-- A mill file made by revision 0001 of the schema, as SQL (sqlite3's iterdump): the mill of conftest.py.
PRAGMA application_id = 1298754668;
BEGIN TRANSACTION;
CREATE TABLE acknowledgement (
	id INTEGER NOT NULL, 
	version_id INTEGER NOT NULL, 
	caution TEXT NOT NULL, 
	reason TEXT NOT NULL, 
	person_id INTEGER NOT NULL, 
	made DATETIME NOT NULL, 
	"by" TEXT NOT NULL, 
	CONSTRAINT pk_acknowledgement PRIMARY KEY (id), 
	CONSTRAINT fk_acknowledgement_version_id FOREIGN KEY(version_id) REFERENCES version (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_acknowledgement_person_id FOREIGN KEY(person_id) REFERENCES person (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "acknowledgement" VALUES(1,1,'unknown lysine','known to be low',1,'2026-03-02 08:15:30.123456','Ann Miller');
CREATE TABLE alembic_version (
	version_num VARCHAR(32) NOT NULL, 
	CONSTRAINT alembic_version_pkc PRIMARY KEY (version_num)
);
INSERT INTO "alembic_version" VALUES('0001');
CREATE TABLE batch (
	id INTEGER NOT NULL, 
	number INTEGER NOT NULL, 
	formula_id INTEGER NOT NULL, 
	version TEXT NOT NULL, 
	order_kg DOUBLE NOT NULL, 
	printed DATETIME NOT NULL, 
	printed_by TEXT NOT NULL, 
	accepted_reason TEXT NOT NULL, 
	accepted_by TEXT NOT NULL, 
	sheet TEXT NOT NULL, 
	copies INTEGER NOT NULL, 
	CONSTRAINT pk_batch PRIMARY KEY (id), 
	CONSTRAINT uq_batch_number UNIQUE (number), 
	CONSTRAINT fk_batch_formula_id FOREIGN KEY(formula_id) REFERENCES formula (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "batch" VALUES(1,1,1,'1',2000.0,'2026-03-02 08:15:30.123456','Ann','','','{"lines": []}',1);
CREATE TABLE bin (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	ingredient_id INTEGER, 
	lot_id INTEGER, 
	site_id INTEGER, 
	CONSTRAINT pk_bin PRIMARY KEY (id), 
	CONSTRAINT fk_bin_ingredient_id FOREIGN KEY(ingredient_id) REFERENCES ingredient (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_bin_lot_id FOREIGN KEY(lot_id) REFERENCES lot (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_bin_site_id FOREIGN KEY(site_id) REFERENCES site (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "bin" VALUES(1,'Bin 4',1,1,1);
CREATE TABLE counter (
	name TEXT NOT NULL, 
	next_value INTEGER NOT NULL, 
	CONSTRAINT pk_counter PRIMARY KEY (name)
);
INSERT INTO "counter" VALUES('mill',2);
INSERT INTO "counter" VALUES('person',2);
INSERT INTO "counter" VALUES('site',2);
INSERT INTO "counter" VALUES('supplier',2);
INSERT INTO "counter" VALUES('scale',3);
INSERT INTO "counter" VALUES('mixer',2);
INSERT INTO "counter" VALUES('nutrient',3);
INSERT INTO "counter" VALUES('formula',3);
INSERT INTO "counter" VALUES('ingredient',4);
INSERT INTO "counter" VALUES('value',4);
INSERT INTO "counter" VALUES('lot',2);
INSERT INTO "counter" VALUES('lot_value',2);
INSERT INTO "counter" VALUES('bin',2);
INSERT INTO "counter" VALUES('price_list',2);
INSERT INTO "counter" VALUES('quote',3);
INSERT INTO "counter" VALUES('synonym',3);
INSERT INTO "counter" VALUES('limit',3);
INSERT INTO "counter" VALUES('version',2);
INSERT INTO "counter" VALUES('acknowledgement',2);
INSERT INTO "counter" VALUES('batch number',2);
INSERT INTO "counter" VALUES('batch',2);
CREATE TABLE formula (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	amounts TEXT NOT NULL, 
	animal TEXT, 
	stage TEXT NOT NULL, 
	batch_kg DOUBLE, 
	admits TEXT NOT NULL, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_formula PRIMARY KEY (id), 
	CONSTRAINT uq_formula_name UNIQUE (name)
);
INSERT INTO "formula" VALUES(1,'Layer mash','blend','poultry','lay',2000.0,'listed','line 1
line 2');
INSERT INTO "formula" VALUES(2,'Cow ration','ration',NULL,'',NULL,'all','');
CREATE TABLE ingredient (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	class_name TEXT NOT NULL, 
	dry_matter_percent DOUBLE, 
	basis TEXT NOT NULL, 
	code TEXT NOT NULL, 
	scale_id INTEGER, 
	stock_kg DOUBLE, 
	density_kg_per_l DOUBLE, 
	bushel_lb DOUBLE, 
	tags TEXT NOT NULL, 
	made_by_formula_id INTEGER, 
	drug TEXT NOT NULL, 
	drug_level TEXT NOT NULL, 
	drug_species TEXT NOT NULL, 
	withdrawal TEXT NOT NULL, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_ingredient PRIMARY KEY (id), 
	CONSTRAINT uq_ingredient_name UNIQUE (name), 
	CONSTRAINT fk_ingredient_scale_id FOREIGN KEY(scale_id) REFERENCES scale (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_ingredient_made_by_formula_id FOREIGN KEY(made_by_formula_id) REFERENCES formula (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "ingredient" VALUES(1,'Maize','Cereals',88.0,'as fed','',1,NULL,NULL,56.0,'',NULL,'','','','','');
INSERT INTO "ingredient" VALUES(2,'Urea','',NULL,'dry matter','',NULL,NULL,NULL,NULL,'non-protein nitrogen, only when listed',NULL,'','','','','');
INSERT INTO "ingredient" VALUES(3,'Premix','',NULL,'as fed','',NULL,NULL,NULL,NULL,'',1,'Monensin','100 mg/kg','','3 days','');
CREATE TABLE "limit" (
	id INTEGER NOT NULL, 
	formula_id INTEGER NOT NULL, 
	kind TEXT NOT NULL, 
	subject TEXT NOT NULL, 
	per TEXT, 
	minimum DOUBLE, 
	maximum DOUBLE, 
	unit TEXT NOT NULL, 
	basis TEXT NOT NULL, 
	at_dry_matter_percent DOUBLE, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_limit PRIMARY KEY (id), 
	CONSTRAINT fk_limit_formula_id FOREIGN KEY(formula_id) REFERENCES formula (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "limit" VALUES(1,1,'nutrient','nutrient 1',NULL,16.0,18.0,'','as fed',NULL,'');
INSERT INTO "limit" VALUES(2,1,'ratio','ingredients 1 2','class Cereals, whole',0.1,NULL,'','at dry matter',88.0,'kept');
CREATE TABLE log_change (
	entry_id INTEGER NOT NULL, 
	position INTEGER NOT NULL, 
	kind TEXT NOT NULL, 
	record_id INTEGER NOT NULL, 
	"before" TEXT, 
	"after" TEXT, 
	CONSTRAINT pk_log_change PRIMARY KEY (entry_id, position), 
	CONSTRAINT fk_log_change_entry_id FOREIGN KEY(entry_id) REFERENCES log_entry (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "log_change" VALUES(1,0,'mill',1,NULL,'{"id":1,"name":"Mühle am Bach","currency":"EUR","ton_means":"t","cwt_means":"","one_person_approves":false}');
INSERT INTO "log_change" VALUES(1,1,'person',1,NULL,'{"id":1,"name":"Ann Miller","capacity":"nutritionist","password_hash":"$hash$","active":true}');
INSERT INTO "log_change" VALUES(1,2,'site',1,NULL,'{"id":1,"name":"North yard"}');
INSERT INTO "log_change" VALUES(1,3,'supplier',1,NULL,'{"id":1,"name":"Bay Grain","note":"pays in 30 days"}');
INSERT INTO "log_change" VALUES(1,4,'scale',1,NULL,'{"id":1,"name":"Big scale","step_kg":5.0,"least_kg":20.0,"greatest_kg":2000.0,"tolerance_percent":null,"hand_add":false,"site_id":1}');
INSERT INTO "log_change" VALUES(1,5,'scale',2,NULL,'{"id":2,"name":"Hand scale","step_kg":0.001,"least_kg":null,"greatest_kg":null,"tolerance_percent":null,"hand_add":true,"site_id":null}');
INSERT INTO "log_change" VALUES(1,6,'mixer',1,NULL,'{"id":1,"name":"Mixer","least_kg":500.0,"greatest_kg":2000.0,"site_id":1}');
INSERT INTO "log_change" VALUES(1,7,'nutrient',1,NULL,'{"id":1,"name":"Crude protein","unit":"%","never_negative":true,"key":"crude protein","note":""}');
INSERT INTO "log_change" VALUES(1,8,'nutrient',2,NULL,'{"id":2,"name":"Energy","unit":"MJ/kg","never_negative":false,"key":"","note":""}');
INSERT INTO "log_change" VALUES(1,9,'formula',1,NULL,'{"id":1,"name":"Layer mash","amounts":"blend","animal":"poultry","stage":"lay","batch_kg":2000.0,"admits":"listed","note":"line 1\nline 2"}');
INSERT INTO "log_change" VALUES(1,10,'formula',2,NULL,'{"id":2,"name":"Cow ration","amounts":"ration","animal":null,"stage":"","batch_kg":null,"admits":"all","note":""}');
INSERT INTO "log_change" VALUES(1,11,'ingredient',1,NULL,'{"id":1,"name":"Maize","class_name":"Cereals","dry_matter_percent":88.0,"basis":"as fed","code":"","scale_id":1,"stock_kg":null,"density_kg_per_l":null,"bushel_lb":56.0,"tags":"","made_by_formula_id":null,"drug":"","drug_level":"","drug_species":"","withdrawal":"","note":""}');
INSERT INTO "log_change" VALUES(1,12,'ingredient',2,NULL,'{"id":2,"name":"Urea","class_name":"","dry_matter_percent":null,"basis":"dry matter","code":"","scale_id":null,"stock_kg":null,"density_kg_per_l":null,"bushel_lb":null,"tags":"non-protein nitrogen, only when listed","made_by_formula_id":null,"drug":"","drug_level":"","drug_species":"","withdrawal":"","note":""}');
INSERT INTO "log_change" VALUES(1,13,'ingredient',3,NULL,'{"id":3,"name":"Premix","class_name":"","dry_matter_percent":null,"basis":"as fed","code":"","scale_id":null,"stock_kg":null,"density_kg_per_l":null,"bushel_lb":null,"tags":"","made_by_formula_id":1,"drug":"Monensin","drug_level":"100 mg/kg","drug_species":"","withdrawal":"3 days","note":""}');
INSERT INTO "log_change" VALUES(1,14,'value',1,NULL,'{"id":1,"ingredient_id":1,"nutrient_id":1,"amount":8.5,"unit":"%","basis":"as fed","origin":"measured","source":"lab 7","date":"2026-03-02","n":12,"sd":0.4,"entered":"8,5"}');
INSERT INTO "log_change" VALUES(1,15,'value',2,NULL,'{"id":2,"ingredient_id":2,"nutrient_id":1,"amount":281.0,"unit":"%","basis":"as fed","origin":null,"source":"","date":null,"n":null,"sd":null,"entered":""}');
INSERT INTO "log_change" VALUES(1,16,'value',3,NULL,'{"id":3,"ingredient_id":1,"nutrient_id":2,"amount":-1.25e-07,"unit":"MJ/kg","basis":"dry matter","origin":null,"source":"","date":null,"n":null,"sd":null,"entered":""}');
INSERT INTO "log_change" VALUES(1,17,'lot',1,NULL,'{"id":1,"ingredient_id":1,"name":"L-77","received":"2026-03-02","mass_kg":24000.0,"supplier_id":1,"note":""}');
INSERT INTO "log_change" VALUES(1,18,'lot_value',1,NULL,'{"id":1,"lot_id":1,"nutrient_id":1,"amount":85.0,"unit":"g/kg","basis":"dry matter","source":"lab 8","date":"2026-03-02"}');
INSERT INTO "log_change" VALUES(1,19,'bin',1,NULL,'{"id":1,"name":"Bin 4","ingredient_id":1,"lot_id":1,"site_id":1}');
INSERT INTO "log_change" VALUES(1,20,'price_list',1,NULL,'{"id":1,"file_name":"march.csv","digest":"abababababababababababababababababababababababababababababababab","applied":"2026-03-02T08:15:30.123456+00:00","rows":30,"accepted":28,"supplier_id":1,"report":"two refused","source":"march","withdrawn":"2026-03-02T08:15:30.123456+00:00"}');
INSERT INTO "log_change" VALUES(1,21,'quote',1,NULL,'{"id":1,"ingredient_id":1,"price":5.6,"per":"bu","bushel_lb":56.0,"site_id":1,"supplier_id":1,"kind":"contract","terms":"delivered","valid_from":"2026-03-02","valid_to":null,"recorded":"2026-03-02","source":"phone","entered":"5,60","price_list_id":1}');
INSERT INTO "log_change" VALUES(1,22,'quote',2,NULL,'{"id":2,"ingredient_id":2,"price":null,"per":"t","bushel_lb":null,"site_id":null,"supplier_id":null,"kind":"replacement","terms":null,"valid_from":null,"valid_to":null,"recorded":null,"source":"","entered":"","price_list_id":null}');
INSERT INTO "log_change" VALUES(1,23,'synonym',1,NULL,'{"id":1,"source":"Bay Grain","name":"corn no 2","ingredient_id":1,"per":"bu","asked":"ingredient","answer":"","rate":null,"given":null}');
INSERT INTO "log_change" VALUES(1,24,'synonym',2,NULL,'{"id":2,"source":"Bay Grain","name":"EUR","ingredient_id":null,"per":"","asked":"rate","answer":"EUR","rate":1.085,"given":"2026-03-02"}');
INSERT INTO "log_change" VALUES(1,25,'limit',1,NULL,'{"id":1,"formula_id":1,"kind":"nutrient","subject":"nutrient 1","per":null,"minimum":16.0,"maximum":18.0,"unit":"","basis":"as fed","at_dry_matter_percent":null,"note":""}');
INSERT INTO "log_change" VALUES(1,26,'limit',2,NULL,'{"id":2,"formula_id":1,"kind":"ratio","subject":"ingredients 1 2","per":"class Cereals, whole","minimum":0.1,"maximum":null,"unit":"","basis":"at dry matter","at_dry_matter_percent":88.0,"note":"kept"}');
INSERT INTO "log_change" VALUES(1,27,'version',1,NULL,'{"id":1,"formula_id":1,"number":1,"state":"approved","snapshot":"{}","made":"2026-03-02T08:15:30.123456+00:00","made_by":"Ann","made_by_id":1,"approved":"2026-03-02T08:15:30.123456+00:00","approved_by":"Ann Miller","approved_by_id":1,"capacity":"nutritionist","note":"n","seal":"abababababababababababababababababababababababababababababababab"}');
INSERT INTO "log_change" VALUES(1,28,'acknowledgement',1,NULL,'{"id":1,"version_id":1,"caution":"unknown lysine","reason":"known to be low","person_id":1,"made":"2026-03-02T08:15:30.123456+00:00","by":"Ann Miller"}');
INSERT INTO "log_change" VALUES(1,29,'batch',1,NULL,'{"id":1,"number":1,"formula_id":1,"version":"1","order_kg":2000.0,"printed":"2026-03-02T08:15:30.123456+00:00","printed_by":"Ann","accepted_reason":"","accepted_by":"","sheet":"{\"lines\": []}","copies":1}');
CREATE TABLE log_entry (
	id INTEGER NOT NULL PRIMARY KEY AUTOINCREMENT, 
	made DATETIME NOT NULL, 
	who TEXT NOT NULL, 
	what TEXT NOT NULL, 
	role TEXT NOT NULL, 
	of_id INTEGER, 
	CONSTRAINT fk_log_entry_of_id FOREIGN KEY(of_id) REFERENCES log_entry (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "log_entry" VALUES(1,'2026-12-01 13:54:15.395345','','New mill','record',NULL);
CREATE TABLE lot (
	id INTEGER NOT NULL, 
	ingredient_id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	received DATE, 
	mass_kg DOUBLE, 
	supplier_id INTEGER, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_lot PRIMARY KEY (id), 
	CONSTRAINT fk_lot_ingredient_id FOREIGN KEY(ingredient_id) REFERENCES ingredient (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_lot_supplier_id FOREIGN KEY(supplier_id) REFERENCES supplier (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "lot" VALUES(1,1,'L-77','2026-03-02',24000.0,1,'');
CREATE TABLE lot_value (
	id INTEGER NOT NULL, 
	lot_id INTEGER NOT NULL, 
	nutrient_id INTEGER NOT NULL, 
	amount DOUBLE NOT NULL, 
	unit TEXT NOT NULL, 
	basis TEXT NOT NULL, 
	source TEXT NOT NULL, 
	date DATE, 
	canonical DOUBLE NOT NULL, 
	CONSTRAINT pk_lot_value PRIMARY KEY (id), 
	CONSTRAINT fk_lot_value_lot_id FOREIGN KEY(lot_id) REFERENCES lot (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_lot_value_nutrient_id FOREIGN KEY(nutrient_id) REFERENCES nutrient (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "lot_value" VALUES(1,1,1,85.0,'g/kg','dry matter','lab 8','2026-03-02',0.085);
CREATE TABLE mill (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	currency TEXT NOT NULL, 
	ton_means TEXT NOT NULL, 
	cwt_means TEXT NOT NULL, 
	one_person_approves BOOLEAN NOT NULL, 
	CONSTRAINT pk_mill PRIMARY KEY (id), 
	CONSTRAINT ck_mill_ck_mill_ck_mill_one_mill CHECK (id = 1)
);
INSERT INTO "mill" VALUES(1,'Mühle am Bach','EUR','t','',0);
CREATE TABLE mixer (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	least_kg DOUBLE, 
	greatest_kg DOUBLE, 
	site_id INTEGER, 
	CONSTRAINT pk_mixer PRIMARY KEY (id), 
	CONSTRAINT uq_mixer_name UNIQUE (name), 
	CONSTRAINT fk_mixer_site_id FOREIGN KEY(site_id) REFERENCES site (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "mixer" VALUES(1,'Mixer',500.0,2000.0,1);
CREATE TABLE nutrient (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	unit TEXT NOT NULL, 
	never_negative BOOLEAN NOT NULL, 
	"key" TEXT NOT NULL, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_nutrient PRIMARY KEY (id), 
	CONSTRAINT uq_nutrient_name UNIQUE (name)
);
INSERT INTO "nutrient" VALUES(1,'Crude protein','%',1,'crude protein','');
INSERT INTO "nutrient" VALUES(2,'Energy','MJ/kg',0,'','');
CREATE TABLE person (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	capacity TEXT NOT NULL, 
	password_hash TEXT NOT NULL, 
	active BOOLEAN NOT NULL, 
	CONSTRAINT pk_person PRIMARY KEY (id), 
	CONSTRAINT uq_person_name UNIQUE (name)
);
INSERT INTO "person" VALUES(1,'Ann Miller','nutritionist','$hash$',1);
CREATE TABLE price_list (
	id INTEGER NOT NULL, 
	file_name TEXT NOT NULL, 
	digest TEXT NOT NULL, 
	applied DATETIME NOT NULL, 
	rows INTEGER NOT NULL, 
	accepted INTEGER NOT NULL, 
	supplier_id INTEGER, 
	report TEXT NOT NULL, 
	source TEXT NOT NULL, 
	withdrawn DATETIME, 
	CONSTRAINT pk_price_list PRIMARY KEY (id), 
	CONSTRAINT fk_price_list_supplier_id FOREIGN KEY(supplier_id) REFERENCES supplier (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "price_list" VALUES(1,'march.csv','abababababababababababababababababababababababababababababababab','2026-03-02 08:15:30.123456',30,28,1,'two refused','march','2026-03-02 08:15:30.123456');
CREATE TABLE quote (
	id INTEGER NOT NULL, 
	ingredient_id INTEGER NOT NULL, 
	price DOUBLE, 
	per TEXT NOT NULL, 
	bushel_lb DOUBLE, 
	site_id INTEGER, 
	supplier_id INTEGER, 
	kind TEXT NOT NULL, 
	terms TEXT, 
	valid_from DATE, 
	valid_to DATE, 
	recorded DATE, 
	source TEXT NOT NULL, 
	entered TEXT NOT NULL, 
	price_list_id INTEGER, 
	price_per_t DOUBLE, 
	CONSTRAINT pk_quote PRIMARY KEY (id), 
	CONSTRAINT fk_quote_ingredient_id FOREIGN KEY(ingredient_id) REFERENCES ingredient (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_quote_site_id FOREIGN KEY(site_id) REFERENCES site (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_quote_supplier_id FOREIGN KEY(supplier_id) REFERENCES supplier (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_quote_price_list_id FOREIGN KEY(price_list_id) REFERENCES price_list (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "quote" VALUES(1,1,5.6,'bu',56.0,1,1,'contract','delivered','2026-03-02',NULL,'2026-03-02','phone','5,60',1,2.20462262184877573652e+02);
INSERT INTO "quote" VALUES(2,2,NULL,'t',NULL,NULL,NULL,'replacement',NULL,NULL,NULL,NULL,'','',NULL,NULL);
CREATE TABLE scale (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	step_kg DOUBLE NOT NULL, 
	least_kg DOUBLE, 
	greatest_kg DOUBLE, 
	tolerance_percent DOUBLE, 
	hand_add BOOLEAN NOT NULL, 
	site_id INTEGER, 
	CONSTRAINT pk_scale PRIMARY KEY (id), 
	CONSTRAINT uq_scale_name UNIQUE (name), 
	CONSTRAINT fk_scale_site_id FOREIGN KEY(site_id) REFERENCES site (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "scale" VALUES(1,'Big scale',5.0,20.0,2000.0,NULL,0,1);
INSERT INTO "scale" VALUES(2,'Hand scale',0.001,NULL,NULL,NULL,1,NULL);
CREATE TABLE site (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	CONSTRAINT pk_site PRIMARY KEY (id), 
	CONSTRAINT uq_site_name UNIQUE (name)
);
INSERT INTO "site" VALUES(1,'North yard');
CREATE TABLE supplier (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	note TEXT NOT NULL, 
	CONSTRAINT pk_supplier PRIMARY KEY (id), 
	CONSTRAINT uq_supplier_name UNIQUE (name)
);
INSERT INTO "supplier" VALUES(1,'Bay Grain','pays in 30 days');
CREATE TABLE synonym (
	id INTEGER NOT NULL, 
	source TEXT NOT NULL, 
	name TEXT NOT NULL, 
	ingredient_id INTEGER, 
	per TEXT NOT NULL, 
	asked TEXT NOT NULL, 
	answer TEXT NOT NULL, 
	rate DOUBLE, 
	given DATE, 
	CONSTRAINT pk_synonym PRIMARY KEY (id), 
	CONSTRAINT fk_synonym_ingredient_id FOREIGN KEY(ingredient_id) REFERENCES ingredient (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "synonym" VALUES(1,'Bay Grain','corn no 2',1,'bu','ingredient','',NULL,NULL);
INSERT INTO "synonym" VALUES(2,'Bay Grain','EUR',NULL,'','rate','EUR',1.085,'2026-03-02');
CREATE TABLE value (
	id INTEGER NOT NULL, 
	ingredient_id INTEGER NOT NULL, 
	nutrient_id INTEGER NOT NULL, 
	amount DOUBLE NOT NULL, 
	unit TEXT NOT NULL, 
	basis TEXT NOT NULL, 
	origin TEXT, 
	source TEXT NOT NULL, 
	date DATE, 
	n INTEGER, 
	sd DOUBLE, 
	entered TEXT NOT NULL, 
	canonical DOUBLE NOT NULL, 
	CONSTRAINT pk_value PRIMARY KEY (id), 
	CONSTRAINT uq_value_ingredient_id_nutrient_id UNIQUE (ingredient_id, nutrient_id), 
	CONSTRAINT fk_value_ingredient_id FOREIGN KEY(ingredient_id) REFERENCES ingredient (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_value_nutrient_id FOREIGN KEY(nutrient_id) REFERENCES nutrient (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "value" VALUES(1,1,1,8.5,'%','as fed','measured','lab 7','2026-03-02',12,0.4,'8,5',0.085);
INSERT INTO "value" VALUES(2,2,1,281.0,'%','as fed',NULL,'',NULL,NULL,NULL,'',2.81);
INSERT INTO "value" VALUES(3,1,2,-1.25e-07,'MJ/kg','dry matter',NULL,'',NULL,NULL,NULL,'',-1.25e-07);
CREATE TABLE version (
	id INTEGER NOT NULL, 
	formula_id INTEGER NOT NULL, 
	number INTEGER NOT NULL, 
	state TEXT NOT NULL, 
	snapshot TEXT NOT NULL, 
	made DATETIME NOT NULL, 
	made_by TEXT NOT NULL, 
	made_by_id INTEGER, 
	approved DATETIME, 
	approved_by TEXT NOT NULL, 
	approved_by_id INTEGER, 
	capacity TEXT NOT NULL, 
	note TEXT NOT NULL, 
	seal TEXT NOT NULL, 
	CONSTRAINT pk_version PRIMARY KEY (id), 
	CONSTRAINT uq_version_formula_id_number UNIQUE (formula_id, number), 
	CONSTRAINT fk_version_formula_id FOREIGN KEY(formula_id) REFERENCES formula (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_version_made_by_id FOREIGN KEY(made_by_id) REFERENCES person (id) DEFERRABLE INITIALLY DEFERRED, 
	CONSTRAINT fk_version_approved_by_id FOREIGN KEY(approved_by_id) REFERENCES person (id) DEFERRABLE INITIALLY DEFERRED
);
INSERT INTO "version" VALUES(1,1,1,'approved','{}','2026-03-02 08:15:30.123456','Ann',1,'2026-03-02 08:15:30.123456','Ann Miller',1,'nutritionist','n','abababababababababababababababababababababababababababababababab');
CREATE INDEX ix_log_entry_of_id ON log_entry (of_id);
CREATE INDEX ix_batch_formula_id ON batch (formula_id);
CREATE INDEX ix_limit_formula_id ON "limit" (formula_id);
CREATE INDEX ix_mixer_site_id ON mixer (site_id);
CREATE INDEX ix_price_list_supplier_id ON price_list (supplier_id);
CREATE INDEX ix_scale_site_id ON scale (site_id);
CREATE INDEX ix_version_approved_by_id ON version (approved_by_id);
CREATE INDEX ix_version_formula_id ON version (formula_id);
CREATE INDEX ix_version_made_by_id ON version (made_by_id);
CREATE INDEX ix_acknowledgement_person_id ON acknowledgement (person_id);
CREATE INDEX ix_acknowledgement_version_id ON acknowledgement (version_id);
CREATE INDEX ix_ingredient_made_by_formula_id ON ingredient (made_by_formula_id);
CREATE INDEX ix_ingredient_scale_id ON ingredient (scale_id);
CREATE INDEX ix_lot_ingredient_id ON lot (ingredient_id);
CREATE INDEX ix_lot_supplier_id ON lot (supplier_id);
CREATE INDEX ix_quote_ingredient_id ON quote (ingredient_id);
CREATE INDEX ix_quote_price_list_id ON quote (price_list_id);
CREATE INDEX ix_quote_site_id ON quote (site_id);
CREATE INDEX ix_quote_supplier_id ON quote (supplier_id);
CREATE INDEX ix_synonym_ingredient_id ON synonym (ingredient_id);
CREATE INDEX ix_value_ingredient_id ON value (ingredient_id);
CREATE INDEX ix_value_nutrient_id ON value (nutrient_id);
CREATE INDEX ix_bin_ingredient_id ON bin (ingredient_id);
CREATE INDEX ix_bin_lot_id ON bin (lot_id);
CREATE INDEX ix_bin_site_id ON bin (site_id);
CREATE INDEX ix_lot_value_lot_id ON lot_value (lot_id);
CREATE INDEX ix_lot_value_nutrient_id ON lot_value (nutrient_id);
CREATE TRIGGER log_entry_no_update BEFORE UPDATE ON log_entry BEGIN SELECT RAISE(ABORT, 'the change log is only added to'); END;
CREATE TRIGGER log_entry_no_delete BEFORE DELETE ON log_entry BEGIN SELECT RAISE(ABORT, 'the change log is only added to'); END;
CREATE TRIGGER log_change_no_update BEFORE UPDATE ON log_change BEGIN SELECT RAISE(ABORT, 'the change log is only added to'); END;
CREATE TRIGGER log_change_no_delete BEFORE DELETE ON log_change BEGIN SELECT RAISE(ABORT, 'the change log is only added to'); END;
DELETE FROM "sqlite_sequence";
INSERT INTO "sqlite_sequence" VALUES('log_entry',1);
COMMIT;
