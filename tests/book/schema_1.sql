CREATE TABLE coils ( id TEXT NOT NULL, number TEXT NOT NULL, bench TEXT NOT NULL, year INTEGER NOT NULL, serial INTEGER NOT NULL, recipe TEXT NOT NULL, recipe_digest TEXT NOT NULL, batch TEXT NOT NULL, "of" INTEGER NOT NULL, operator TEXT NOT NULL, started TEXT NOT NULL, ended TEXT, outcome TEXT NOT NULL, reason TEXT NOT NULL, turns DOUBLE, dcr_20c_ohm DOUBLE, dcr_u95_ohm DOUBLE, target_kind TEXT NOT NULL, target_value DOUBLE NOT NULL, verdict TEXT NOT NULL, program_digest TEXT NOT NULL, trace_digest TEXT, n_entries INTEGER NOT NULL, record_digest TEXT NOT NULL, PRIMARY KEY (id), UNIQUE (bench, year, serial), UNIQUE (number) );
CREATE INDEX coils_by_batch ON coils (batch);
CREATE INDEX coils_by_recipe ON coils (recipe);
CREATE INDEX coils_by_start ON coils (started, number);
CREATE TABLE curve ( coil TEXT NOT NULL, seq INTEGER NOT NULL, turn DOUBLE NOT NULL, ohm_20c DOUBLE NOT NULL, final_ohm DOUBLE NOT NULL, final_sd DOUBLE NOT NULL, PRIMARY KEY (coil, seq), FOREIGN KEY(coil) REFERENCES coils (id) ) WITHOUT ROWID;
CREATE TABLE entries ( coil TEXT NOT NULL, seq INTEGER NOT NULL, kind TEXT NOT NULL, events INTEGER NOT NULL, payload BLOB NOT NULL, link BLOB NOT NULL, PRIMARY KEY (coil, seq), FOREIGN KEY(coil) REFERENCES coils (id) ) WITHOUT ROWID;
CREATE TABLE ledger ( version INTEGER NOT NULL, name TEXT NOT NULL, PRIMARY KEY (version) );
CREATE TABLE numbers ( bench TEXT NOT NULL, year INTEGER NOT NULL, last INTEGER NOT NULL, PRIMARY KEY (bench, year) );
