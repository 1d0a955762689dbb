-- SPDX-License-Identifier: Apache-2.0
-- One timeline file. Base tables stand in schema "ledger"; the views in "main" are what people see and query.
-- Years are decimal, proleptic Gregorian, astronomical (1 BCE is 0): always DOUBLE, never DATE.
-- Ids are handed out by ledger.counter and never used twice. Entries, links and members carry no index: a million rows would pay
-- for it on every load, and what it would guard is made in one place.

CREATE SCHEMA ledger;

CREATE TABLE ledger.about (key VARCHAR PRIMARY KEY, value VARCHAR NOT NULL);
COMMENT ON TABLE ledger.about IS 'What this file is: schema version, who made it and when, first load, state of the linking';
COMMENT ON COLUMN ledger.about.key IS 'schema_version, made_by, created, first_loaded_year, linked (yes or no), link_options, link_notes';
COMMENT ON COLUMN ledger.about.value IS 'Its value as text';

CREATE TABLE ledger.counter (name VARCHAR PRIMARY KEY, last BIGINT NOT NULL);
COMMENT ON TABLE ledger.counter IS 'The last id handed out, by kind';
COMMENT ON COLUMN ledger.counter.name IS 'source, entry, decision, run';
COMMENT ON COLUMN ledger.counter.last IS 'The last id of that kind; the next is one more';
INSERT INTO ledger.counter VALUES ('source', 0), ('entry', 0), ('decision', 0), ('run', 0);

CREATE TABLE ledger.source (
    source BIGINT PRIMARY KEY,
    name VARCHAR NOT NULL UNIQUE CHECK (name <> ''),
    title VARCHAR,
    citation VARCHAR,
    compiled INTEGER,
    criterion VARCHAR,
    file VARCHAR,
    encoding VARCHAR,
    derives_from VARCHAR[],
    precedes VARCHAR,
    sheet VARCHAR,
    settings VARCHAR,
    digest VARCHAR,
    loaded_at TIMESTAMP,
    rows_read BIGINT NOT NULL DEFAULT 0,
    rows_loaded BIGINT NOT NULL DEFAULT 0,
    rows_rejected BIGINT NOT NULL DEFAULT 0,
    duplicates BIGINT NOT NULL DEFAULT 0,
    notes VARCHAR[],
    CHECK (rows_read = rows_loaded + rows_rejected)
);
COMMENT ON TABLE ledger.source IS 'One compiler''s list: where it came from and what became of its rows';
COMMENT ON COLUMN ledger.source.source IS 'Id of the list';
COMMENT ON COLUMN ledger.source.name IS 'Short name of the list';
COMMENT ON COLUMN ledger.source.title IS 'Full title of the compilation';
COMMENT ON COLUMN ledger.source.citation IS 'How to cite it';
COMMENT ON COLUMN ledger.source.compiled IS 'Year in which it was compiled; its own "years ago" count from here';
COMMENT ON COLUMN ledger.source.criterion IS 'What the compiler took in';
COMMENT ON COLUMN ledger.source.file IS 'File it was loaded from';
COMMENT ON COLUMN ledger.source.encoding IS 'Character encoding of that file';
COMMENT ON COLUMN ledger.source.derives_from IS 'Names of lists it was drawn from; lists with a common ancestor count once in support';
COMMENT ON COLUMN ledger.source.precedes IS 'Known orders as JSON: [["earlier title", "later title"], ...]';
COMMENT ON COLUMN ledger.source.sheet IS 'The sheet as it was, TOML text';
COMMENT ON COLUMN ledger.source.settings IS 'Dating settings that were in force, JSON';
COMMENT ON COLUMN ledger.source.digest IS 'SHA-256 of the file and its sheet: the same again changes nothing';
COMMENT ON COLUMN ledger.source.loaded_at IS 'When it was last loaded, UTC';
COMMENT ON COLUMN ledger.source.rows_read IS 'Rows in the file';
COMMENT ON COLUMN ledger.source.rows_loaded IS 'Rows that became entries';
COMMENT ON COLUMN ledger.source.rows_rejected IS 'Rows that were refused, each with its reason';
COMMENT ON COLUMN ledger.source.duplicates IS 'Entries that repeat title and date of an earlier row; kept and marked';
COMMENT ON COLUMN ledger.source.notes IS 'Remarks of the load';

CREATE TABLE ledger.notation (code SMALLINT PRIMARY KEY, name VARCHAR NOT NULL UNIQUE);
COMMENT ON TABLE ledger.notation IS 'Names of the date notations, coded';
COMMENT ON COLUMN ledger.notation.code IS 'Code used in ledger.entry';
COMMENT ON COLUMN ledger.notation.name IS 'Name of the notation';

CREATE TABLE ledger.entry (
    entry BIGINT NOT NULL,
    source BIGINT NOT NULL,
    row BIGINT NOT NULL,
    nth INTEGER NOT NULL DEFAULT 1,
    title VARCHAR NOT NULL,
    earliest DOUBLE NOT NULL,
    best DOUBLE NOT NULL,
    latest DOUBLE NOT NULL,
    normal BOOLEAN NOT NULL DEFAULT false,
    notation SMALLINT NOT NULL,
    date_text VARCHAR,
    category VARCHAR,
    importance DOUBLE,
    level VARCHAR,
    parent VARCHAR,
    note VARCHAR,
    duplicate BOOLEAN NOT NULL DEFAULT false,
    rest VARCHAR,
    CHECK (isfinite(earliest) AND isfinite(latest) AND earliest <= best AND best <= latest)
);
COMMENT ON TABLE ledger.entry IS 'One row of one list, dated; list, notation and shape are coded';
COMMENT ON COLUMN ledger.entry.entry IS 'Id of the entry; kept over reloads while list, title and nth live';
COMMENT ON COLUMN ledger.entry.source IS 'Id of its list';
COMMENT ON COLUMN ledger.entry.row IS 'Row number in the file';
COMMENT ON COLUMN ledger.entry.nth IS 'Counts entries of the same title within the list, from 1';
COMMENT ON COLUMN ledger.entry.title IS 'Title as loaded';
COMMENT ON COLUMN ledger.entry.earliest IS 'Earliest decimal year (2.5 % point of a normal dating)';
COMMENT ON COLUMN ledger.entry.best IS 'Best decimal year: the median';
COMMENT ON COLUMN ledger.entry.latest IS 'Latest decimal year (97.5 % point of a normal dating)';
COMMENT ON COLUMN ledger.entry.normal IS 'True where the dating is a two-piece normal, false where it is uniform';
COMMENT ON COLUMN ledger.entry.notation IS 'Code of the notation that read the date';
COMMENT ON COLUMN ledger.entry.date_text IS 'Date as the compiler wrote it';
COMMENT ON COLUMN ledger.entry.category IS 'Category stated by the list';
COMMENT ON COLUMN ledger.entry.importance IS 'Importance stated by the list; higher is more important';
COMMENT ON COLUMN ledger.entry.level IS 'Level of granularity stated by the list';
COMMENT ON COLUMN ledger.entry.parent IS 'Title of the entry it is a part of';
COMMENT ON COLUMN ledger.entry.note IS 'Note of the list';
COMMENT ON COLUMN ledger.entry.duplicate IS 'True where an earlier row of the list has the same title and date';
COMMENT ON COLUMN ledger.entry.rest IS 'Columns that no other column holds, as a JSON object';

CREATE TABLE ledger.reject (source BIGINT NOT NULL, row BIGINT, raw VARCHAR, reason VARCHAR NOT NULL);
COMMENT ON TABLE ledger.reject IS 'Rows that were refused: nothing is lost, nothing is guessed';
COMMENT ON COLUMN ledger.reject.source IS 'Id of the list';
COMMENT ON COLUMN ledger.reject.row IS 'Row number in the file';
COMMENT ON COLUMN ledger.reject.raw IS 'The row as it stood';
COMMENT ON COLUMN ledger.reject.reason IS 'Why it was refused';

CREATE TABLE ledger.link (
    a BIGINT NOT NULL,
    b BIGINT NOT NULL,
    score DOUBLE,
    state VARCHAR NOT NULL CHECK (state IN ('linked', 'implied', 'review', 'blocked', 'same', 'different')),
    title DOUBLE,
    gap DOUBLE,
    title_evidence DOUBLE,
    date_evidence DOUBLE,
    category_evidence DOUBLE,
    prior DOUBLE,
    rivals DOUBLE,
    CHECK (a < b)
);
COMMENT ON TABLE ledger.link IS 'Pairs of entries that were compared, or that stand in one milestone';
COMMENT ON COLUMN ledger.link.a IS 'Id of the entry with the smaller id';
COMMENT ON COLUMN ledger.link.b IS 'Id of the other entry';
COMMENT ON COLUMN ledger.link.score IS 'Probability that both mean the same event, 0 to 1';
COMMENT ON COLUMN ledger.link.state IS 'linked, implied, review, blocked, same or different';
COMMENT ON COLUMN ledger.link.title IS 'Similarity of the titles, 0 to 1';
COMMENT ON COLUMN ledger.link.gap IS 'Years between the best dates';
COMMENT ON COLUMN ledger.link.title_evidence IS 'What the titles say for (or, below 0, against) one event, bits';
COMMENT ON COLUMN ledger.link.date_evidence IS 'What the dates say, bits';
COMMENT ON COLUMN ledger.link.category_evidence IS 'What the categories say, bits; 0 where the lists share no vocabulary';
COMMENT ON COLUMN ledger.link.prior IS 'Log odds before looking, bits';
COMMENT ON COLUMN ledger.link.rivals IS 'What rival pairs take away, bits';

CREATE TABLE ledger.decision (
    decision BIGINT PRIMARY KEY,
    source_a VARCHAR NOT NULL,
    title_a VARCHAR NOT NULL,
    nth_a INTEGER NOT NULL,
    source_b VARCHAR NOT NULL,
    title_b VARCHAR NOT NULL,
    nth_b INTEGER NOT NULL,
    verdict VARCHAR NOT NULL CHECK (verdict IN ('same', 'different')),
    who VARCHAR NOT NULL,
    decided_at TIMESTAMP NOT NULL,
    why VARCHAR,
    date_a VARCHAR,
    date_b VARCHAR,
    withdrawn_at TIMESTAMP
);
COMMENT ON TABLE ledger.decision IS 'What people settled about pairs, keyed by list, title and nth so that it survives reloading';
COMMENT ON COLUMN ledger.decision.decision IS 'Id of the decision, in order of making';
COMMENT ON COLUMN ledger.decision.source_a IS 'Name of the first entry''s list';
COMMENT ON COLUMN ledger.decision.title_a IS 'Title of the first entry';
COMMENT ON COLUMN ledger.decision.nth_a IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN ledger.decision.source_b IS 'Name of the second entry''s list';
COMMENT ON COLUMN ledger.decision.title_b IS 'Title of the second entry';
COMMENT ON COLUMN ledger.decision.nth_b IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN ledger.decision.verdict IS 'same or different';
COMMENT ON COLUMN ledger.decision.who IS 'Who decided';
COMMENT ON COLUMN ledger.decision.decided_at IS 'When, UTC';
COMMENT ON COLUMN ledger.decision.why IS 'Why';
COMMENT ON COLUMN ledger.decision.date_a IS 'Date text of the first entry at that time';
COMMENT ON COLUMN ledger.decision.date_b IS 'Date text of the second entry at that time';
COMMENT ON COLUMN ledger.decision.withdrawn_at IS 'When it was withdrawn or replaced, UTC; empty while it stands';

CREATE TABLE ledger.milestone (
    milestone BIGINT NOT NULL,
    title VARCHAR NOT NULL,
    earliest DOUBLE NOT NULL,
    best DOUBLE NOT NULL,
    latest DOUBLE NOT NULL,
    unit DOUBLE NOT NULL DEFAULT 0,
    sd DOUBLE NOT NULL DEFAULT 0,
    support INTEGER NOT NULL DEFAULT 1,
    entries INTEGER NOT NULL DEFAULT 1,
    q DOUBLE,
    q_p DOUBLE,
    i2 DOUBLE,
    birge DOUBLE,
    disjoint BOOLEAN NOT NULL DEFAULT false,
    category VARCHAR,
    importance DOUBLE,
    level VARCHAR,
    parent VARCHAR,
    sources VARCHAR,
    CHECK (isfinite(earliest) AND isfinite(latest) AND earliest <= best AND best <= latest)
);
COMMENT ON TABLE ledger.milestone IS 'Entries of several lists that mean one event, with their pooled dating';
COMMENT ON COLUMN ledger.milestone.milestone IS 'Id: the smallest entry id among its members';
COMMENT ON COLUMN ledger.milestone.title IS 'Title of its most central member';
COMMENT ON COLUMN ledger.milestone.earliest IS 'Earliest decimal year of the pooled dating';
COMMENT ON COLUMN ledger.milestone.best IS 'Best decimal year: the median of the pooled dating';
COMMENT ON COLUMN ledger.milestone.latest IS 'Latest decimal year of the pooled dating';
COMMENT ON COLUMN ledger.milestone.unit IS 'Width to which it is dated, years';
COMMENT ON COLUMN ledger.milestone.sd IS 'Standard deviation of a normal dating, years; 0 otherwise';
COMMENT ON COLUMN ledger.milestone.support IS 'Independent lists that name it; lists with a common ancestor count once';
COMMENT ON COLUMN ledger.milestone.entries IS 'Entries in it';
COMMENT ON COLUMN ledger.milestone.q IS 'Cochran''s Q of its datings; empty for one entry';
COMMENT ON COLUMN ledger.milestone.q_p IS 'Chance of a Q as large when all datings mean one date';
COMMENT ON COLUMN ledger.milestone.i2 IS 'I squared, 0 to 1: share of the spread that dating errors do not explain';
COMMENT ON COLUMN ledger.milestone.birge IS 'Birge ratio of its datings';
COMMENT ON COLUMN ledger.milestone.disjoint IS 'True where some of its datings share no year';
COMMENT ON COLUMN ledger.milestone.category IS 'Category most of its entries state';
COMMENT ON COLUMN ledger.milestone.importance IS 'Mean of the importances its entries state';
COMMENT ON COLUMN ledger.milestone.level IS 'Level most of its entries state';
COMMENT ON COLUMN ledger.milestone.parent IS 'Parent most of its entries state';
COMMENT ON COLUMN ledger.milestone.sources IS 'Names of the lists that name it, joined by "; "';

CREATE TABLE ledger.member (
    entry BIGINT NOT NULL,
    milestone BIGINT NOT NULL,
    weight DOUBLE NOT NULL,
    normal BOOLEAN NOT NULL,
    low DOUBLE NOT NULL,
    mode DOUBLE NOT NULL,
    high DOUBLE NOT NULL
);
COMMENT ON TABLE ledger.member IS 'Which entry stands in which milestone';
COMMENT ON COLUMN ledger.member.entry IS 'Id of the entry';
COMMENT ON COLUMN ledger.member.milestone IS 'Id of the milestone';
COMMENT ON COLUMN ledger.member.weight IS 'Weight of its part in the pooled dating; weights of a milestone sum to 1';
COMMENT ON COLUMN ledger.member.normal IS 'True where its part of the pooled dating is a two-piece normal';
COMMENT ON COLUMN ledger.member.low IS 'Earliest decimal year of that part: the entry''s own in a mixture, the pooled one otherwise';
COMMENT ON COLUMN ledger.member.mode IS 'Best decimal year of that part';
COMMENT ON COLUMN ledger.member.high IS 'Latest decimal year of that part';

CREATE TABLE ledger.stated_order (origin VARCHAR NOT NULL, earlier VARCHAR NOT NULL, later VARCHAR NOT NULL);
COMMENT ON TABLE ledger.stated_order IS 'Known orders stated in a file of their own rather than in a list''s sheet';
COMMENT ON COLUMN ledger.stated_order.origin IS 'File that states it';
COMMENT ON COLUMN ledger.stated_order.earlier IS 'Title of what came first';
COMMENT ON COLUMN ledger.stated_order.later IS 'Title of what came after';

CREATE TABLE ledger.known_order (earlier BIGINT NOT NULL, later BIGINT NOT NULL, stated_by VARCHAR NOT NULL);
COMMENT ON TABLE ledger.known_order IS 'Known orders between milestones; free of cycles';
COMMENT ON COLUMN ledger.known_order.earlier IS 'Id of the milestone that came first';
COMMENT ON COLUMN ledger.known_order.later IS 'Id of the milestone that came after';
COMMENT ON COLUMN ledger.known_order.stated_by IS 'List or file that states it';

CREATE TABLE ledger.run (
    run BIGINT PRIMARY KEY,
    run_at TIMESTAMP NOT NULL,
    command VARCHAR NOT NULL,
    version VARCHAR NOT NULL,
    seed BIGINT,
    draws BIGINT,
    record VARCHAR,
    result VARCHAR
);
COMMENT ON TABLE ledger.run IS 'Runs of grid and report, so that a printed figure can be made again';
COMMENT ON COLUMN ledger.run.run IS 'Id of the run';
COMMENT ON COLUMN ledger.run.run_at IS 'When, UTC';
COMMENT ON COLUMN ledger.run.command IS 'Command line';
COMMENT ON COLUMN ledger.run.version IS 'Version of the program';
COMMENT ON COLUMN ledger.run.seed IS 'Seed of the random numbers';
COMMENT ON COLUMN ledger.run.draws IS 'Number of draws';
COMMENT ON COLUMN ledger.run.record IS 'Hash of the record that was analysed';
COMMENT ON COLUMN ledger.run.result IS 'Main results, JSON';
