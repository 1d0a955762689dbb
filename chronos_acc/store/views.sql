-- SPDX-License-Identifier: Apache-2.0
-- What people see. Variables: present, start, min_support, category (SET VARIABLE name = value), each with a default.
-- A window query is filtered before it looks ahead: what lies outside the window must not stand next to what lies inside.

CREATE MACRO present_year() AS coalesce(
    getvariable('present')::DOUBLE,
    (SELECT min(compiled) + 1.0 FROM ledger.source WHERE rows_loaded > 0),
    (SELECT value::DOUBLE + 1.0 FROM ledger.about WHERE key = 'first_loaded_year')
);
COMMENT ON MACRO present_year IS 'The present: variable present, else the end of the earliest compile year, else the end of the year of the first load';

CREATE VIEW entries AS
SELECT
    e.entry, s.name AS source, e.title, e.earliest, e.best, e.latest,
    CASE WHEN e.normal THEN 'normal' ELSE 'uniform' END AS shape,
    n.name AS notation, e.date_text, e.row, e.nth, e.duplicate,
    e.category, e.importance, e.level, e.parent, e.note, e.rest
FROM ledger.entry AS e
JOIN ledger.source AS s ON s.source = e.source
LEFT JOIN ledger.notation AS n ON n.code = e.notation;
COMMENT ON VIEW entries IS 'Every dated row of every list, one row an entry';
COMMENT ON COLUMN entries.entry IS 'Id of the entry';
COMMENT ON COLUMN entries.source IS 'Name of its list';
COMMENT ON COLUMN entries.title IS 'Title as loaded';
COMMENT ON COLUMN entries.earliest IS 'Earliest decimal year (2.5 % point of a normal dating)';
COMMENT ON COLUMN entries.best IS 'Best decimal year: the median';
COMMENT ON COLUMN entries.latest IS 'Latest decimal year (97.5 % point of a normal dating)';
COMMENT ON COLUMN entries.shape IS 'uniform or normal (two-piece)';
COMMENT ON COLUMN entries.notation IS 'Notation that read the date';
COMMENT ON COLUMN entries.date_text IS 'Date as the compiler wrote it';
COMMENT ON COLUMN entries.row IS 'Row number in the file';
COMMENT ON COLUMN entries.nth IS 'Counts entries of the same title within the list, from 1';
COMMENT ON COLUMN entries.duplicate IS 'True where an earlier row of the list has the same title and date';
COMMENT ON COLUMN entries.category IS 'Category stated by the list';
COMMENT ON COLUMN entries.importance IS 'Importance stated by the list; higher is more important';
COMMENT ON COLUMN entries.level IS 'Level of granularity stated by the list';
COMMENT ON COLUMN entries.parent IS 'Title of the entry it is a part of';
COMMENT ON COLUMN entries.note IS 'Note of the list';
COMMENT ON COLUMN entries.rest IS 'Columns that no other column holds, as a JSON object';

CREATE VIEW sources AS
SELECT
    s.name AS source, s.title, s.citation, s.compiled, s.criterion, s.file, s.encoding,
    array_to_string(s.derives_from, '; ') AS derives_from,
    s.rows_read, s.rows_loaded, s.rows_rejected, s.duplicates,
    e.earliest, e.latest, coalesce(e.milestones, 0) AS milestones, coalesce(e.alone, 0) AS alone,
    s.loaded_at, array_to_string(s.notes, '; ') AS notes
FROM ledger.source AS s
LEFT JOIN (
    SELECT
        e.source, min(e.earliest) AS earliest, max(e.latest) AS latest,
        count(DISTINCT m.milestone) AS milestones,
        count(DISTINCT m.milestone) FILTER (WHERE p.support = 1) AS alone
    FROM ledger.entry AS e
    LEFT JOIN ledger.member AS m ON m.entry = e.entry
    LEFT JOIN ledger.milestone AS p ON p.milestone = m.milestone
    GROUP BY e.source
) AS e ON e.source = s.source;
COMMENT ON VIEW sources IS 'The lists: provenance, and what became of every row';
COMMENT ON COLUMN sources.source IS 'Short name of the list';
COMMENT ON COLUMN sources.title IS 'Full title of the compilation';
COMMENT ON COLUMN sources.citation IS 'How to cite it';
COMMENT ON COLUMN sources.compiled IS 'Year in which it was compiled';
COMMENT ON COLUMN sources.criterion IS 'What the compiler took in';
COMMENT ON COLUMN sources.file IS 'File it was loaded from';
COMMENT ON COLUMN sources.encoding IS 'Character encoding of that file';
COMMENT ON COLUMN sources.derives_from IS 'Lists it was drawn from, joined by "; "';
COMMENT ON COLUMN sources.rows_read IS 'Rows in the file';
COMMENT ON COLUMN sources.rows_loaded IS 'Rows that became entries';
COMMENT ON COLUMN sources.rows_rejected IS 'Rows that were refused';
COMMENT ON COLUMN sources.duplicates IS 'Entries that repeat title and date of an earlier row';
COMMENT ON COLUMN sources.earliest IS 'Earliest bound of any of its datings, decimal year';
COMMENT ON COLUMN sources.latest IS 'Latest bound of any of its datings, decimal year';
COMMENT ON COLUMN sources.milestones IS 'Milestones it names';
COMMENT ON COLUMN sources.alone IS 'Milestones that no independent list names beside it';
COMMENT ON COLUMN sources.loaded_at IS 'When it was last loaded, UTC';
COMMENT ON COLUMN sources.notes IS 'Remarks of the load, joined by "; "';

CREATE VIEW rejects AS
SELECT s.name AS source, r.row, r.raw, r.reason FROM ledger.reject AS r JOIN ledger.source AS s ON s.source = r.source;
COMMENT ON VIEW rejects IS 'Rows that were refused, with the reason; mend them and load the list again';
COMMENT ON COLUMN rejects.source IS 'Name of the list';
COMMENT ON COLUMN rejects.row IS 'Row number in the file';
COMMENT ON COLUMN rejects.raw IS 'The row as it stood';
COMMENT ON COLUMN rejects.reason IS 'Why it was refused';

CREATE VIEW links AS
SELECT
    sa.name AS source_a, a.title AS title_a, sb.name AS source_b, b.title AS title_b, l.score, l.state,
    a.date_text AS date_a, b.date_text AS date_b, a.best AS best_a, b.best AS best_b,
    a.nth AS nth_a, b.nth AS nth_b, l.a AS entry_a, l.b AS entry_b,
    ma.milestone AS milestone_a, mb.milestone AS milestone_b,
    l.title AS title_similarity, l.gap, l.title_evidence, l.date_evidence, l.category_evidence, l.prior, l.rivals
FROM ledger.link AS l
JOIN ledger.entry AS a ON a.entry = l.a
JOIN ledger.entry AS b ON b.entry = l.b
JOIN ledger.source AS sa ON sa.source = a.source
JOIN ledger.source AS sb ON sb.source = b.source
LEFT JOIN ledger.member AS ma ON ma.entry = l.a
LEFT JOIN ledger.member AS mb ON mb.entry = l.b;
COMMENT ON VIEW links IS 'Pairs of entries that were compared, or that stand in one milestone';
COMMENT ON COLUMN links.source_a IS 'Name of the first entry''s list';
COMMENT ON COLUMN links.title_a IS 'Title of the first entry';
COMMENT ON COLUMN links.source_b IS 'Name of the second entry''s list';
COMMENT ON COLUMN links.title_b IS 'Title of the second entry';
COMMENT ON COLUMN links.score IS 'Probability that both mean the same event, 0 to 1; empty where the pair was not compared';
COMMENT ON COLUMN links.state IS 'linked (scored, in one milestone), implied (in one milestone, not joined directly), review, blocked, same, different';
COMMENT ON COLUMN links.date_a IS 'Date text of the first entry';
COMMENT ON COLUMN links.date_b IS 'Date text of the second entry';
COMMENT ON COLUMN links.best_a IS 'Best decimal year of the first entry';
COMMENT ON COLUMN links.best_b IS 'Best decimal year of the second entry';
COMMENT ON COLUMN links.nth_a IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN links.nth_b IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN links.entry_a IS 'Id of the first entry';
COMMENT ON COLUMN links.entry_b IS 'Id of the second entry';
COMMENT ON COLUMN links.milestone_a IS 'Milestone of the first entry';
COMMENT ON COLUMN links.milestone_b IS 'Milestone of the second entry';
COMMENT ON COLUMN links.title_similarity IS 'Similarity of the titles, 0 to 1';
COMMENT ON COLUMN links.gap IS 'Years between the best dates';
COMMENT ON COLUMN links.title_evidence IS 'What the titles say for (or, below 0, against) one event, bits';
COMMENT ON COLUMN links.date_evidence IS 'What the dates say, bits';
COMMENT ON COLUMN links.category_evidence IS 'What the categories say, bits; 0 where the lists share no vocabulary';
COMMENT ON COLUMN links.prior IS 'Log odds before looking, bits';
COMMENT ON COLUMN links.rivals IS 'What rival pairs take away, bits';

CREATE VIEW decisions AS
SELECT
    d.decision, d.source_a, d.title_a, d.nth_a, d.source_b, d.title_b, d.nth_b, d.verdict,
    CASE
        WHEN d.withdrawn_at IS NOT NULL THEN 'withdrawn'
        WHEN a.entry IS NULL OR b.entry IS NULL THEN 'adrift'
        WHEN a.date_text IS DISTINCT FROM d.date_a OR b.date_text IS DISTINCT FROM d.date_b THEN 'date changed'
        ELSE 'holds'
    END AS status,
    d.who, d.decided_at, d.why, d.date_a, d.date_b, d.withdrawn_at, a.entry AS entry_a, b.entry AS entry_b
FROM ledger.decision AS d
LEFT JOIN ledger.source AS sa ON sa.name = d.source_a
LEFT JOIN ledger.source AS sb ON sb.name = d.source_b
LEFT JOIN ledger.entry AS a ON a.source = sa.source AND a.title = d.title_a AND a.nth = d.nth_a
LEFT JOIN ledger.entry AS b ON b.source = sb.source AND b.title = d.title_b AND b.nth = d.nth_b;
COMMENT ON VIEW decisions IS 'What people settled about pairs, and whether it still holds';
COMMENT ON COLUMN decisions.decision IS 'Id of the decision, in order of making';
COMMENT ON COLUMN decisions.source_a IS 'Name of the first entry''s list';
COMMENT ON COLUMN decisions.title_a IS 'Title of the first entry';
COMMENT ON COLUMN decisions.nth_a IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN decisions.source_b IS 'Name of the second entry''s list';
COMMENT ON COLUMN decisions.title_b IS 'Title of the second entry';
COMMENT ON COLUMN decisions.nth_b IS 'Which of the entries with this title in its list, from 1';
COMMENT ON COLUMN decisions.verdict IS 'same or different';
COMMENT ON COLUMN decisions.status IS 'holds; date changed (it still counts, look again); adrift (an entry is gone); withdrawn';
COMMENT ON COLUMN decisions.who IS 'Who decided';
COMMENT ON COLUMN decisions.decided_at IS 'When, UTC';
COMMENT ON COLUMN decisions.why IS 'Why';
COMMENT ON COLUMN decisions.date_a IS 'Date text of the first entry at that time';
COMMENT ON COLUMN decisions.date_b IS 'Date text of the second entry at that time';
COMMENT ON COLUMN decisions.withdrawn_at IS 'When it was withdrawn or replaced, UTC';
COMMENT ON COLUMN decisions.entry_a IS 'Id of the first entry now; empty when it is gone';
COMMENT ON COLUMN decisions.entry_b IS 'Id of the second entry now; empty when it is gone';

CREATE VIEW milestones AS
SELECT
    milestone, title, earliest, best, latest, support, entries, sources, unit, sd, q, q_p, i2, birge, disjoint,
    category, importance, level, parent
FROM ledger.milestone;
COMMENT ON VIEW milestones IS 'Events, each with its pooled dating and the lists that name it';
COMMENT ON COLUMN milestones.milestone IS 'Id: the smallest entry id among its members';
COMMENT ON COLUMN milestones.title IS 'Title of its most central member';
COMMENT ON COLUMN milestones.earliest IS 'Earliest decimal year of the pooled dating';
COMMENT ON COLUMN milestones.best IS 'Best decimal year: the median of the pooled dating';
COMMENT ON COLUMN milestones.latest IS 'Latest decimal year of the pooled dating';
COMMENT ON COLUMN milestones.support IS 'Independent lists that name it; lists with a common ancestor count once';
COMMENT ON COLUMN milestones.entries IS 'Entries in it';
COMMENT ON COLUMN milestones.sources IS 'Names of the lists that name it, joined by "; "';
COMMENT ON COLUMN milestones.unit IS 'Width to which it is dated, years';
COMMENT ON COLUMN milestones.sd IS 'Standard deviation of a normal dating, years; 0 otherwise';
COMMENT ON COLUMN milestones.q IS 'Cochran''s Q of its datings; empty for one entry';
COMMENT ON COLUMN milestones.q_p IS 'Chance of a Q as large when all datings mean one date';
COMMENT ON COLUMN milestones.i2 IS 'I squared, 0 to 1: share of the spread that dating errors do not explain';
COMMENT ON COLUMN milestones.birge IS 'Birge ratio of its datings';
COMMENT ON COLUMN milestones.disjoint IS 'True where some of its datings share no year';
COMMENT ON COLUMN milestones.category IS 'Category most of its entries state';
COMMENT ON COLUMN milestones.importance IS 'Mean of the importances its entries state';
COMMENT ON COLUMN milestones.level IS 'Level most of its entries state';
COMMENT ON COLUMN milestones.parent IS 'Parent most of its entries state';

CREATE VIEW members AS
SELECT
    m.milestone, p.title AS milestone_title, m.entry, s.name AS source, e.title, e.date_text, n.name AS notation,
    e.earliest, e.best, e.latest, CASE WHEN e.normal THEN 'normal' ELSE 'uniform' END AS shape, m.weight, e.row, e.nth
FROM ledger.member AS m
JOIN ledger.milestone AS p ON p.milestone = m.milestone
JOIN ledger.entry AS e ON e.entry = m.entry
JOIN ledger.source AS s ON s.source = e.source
LEFT JOIN ledger.notation AS n ON n.code = e.notation;
COMMENT ON VIEW members IS 'Which entries stand in which milestone, with their datings and weights';
COMMENT ON COLUMN members.milestone IS 'Id of the milestone';
COMMENT ON COLUMN members.milestone_title IS 'Title of the milestone';
COMMENT ON COLUMN members.entry IS 'Id of the entry';
COMMENT ON COLUMN members.source IS 'Name of its list';
COMMENT ON COLUMN members.title IS 'Title of the entry as loaded';
COMMENT ON COLUMN members.date_text IS 'Date as the compiler wrote it';
COMMENT ON COLUMN members.notation IS 'Notation that read the date';
COMMENT ON COLUMN members.earliest IS 'Earliest decimal year of the entry';
COMMENT ON COLUMN members.best IS 'Best decimal year of the entry';
COMMENT ON COLUMN members.latest IS 'Latest decimal year of the entry';
COMMENT ON COLUMN members.shape IS 'uniform or normal (two-piece)';
COMMENT ON COLUMN members.weight IS 'Weight in the pooled dating';
COMMENT ON COLUMN members.row IS 'Row number in the file';
COMMENT ON COLUMN members.nth IS 'Counts entries of the same title within the list, from 1';

CREATE VIEW intervals AS
WITH here AS MATERIALIZED (SELECT present_year() AS present)
SELECT
    milestone, title, best AS year, present - best AS age, lead(best, 1, present) OVER w - best AS interval,
    lead(milestone) OVER w AS next_milestone, lead(milestone) OVER w IS NULL AS open, support, category, earliest, latest
FROM ledger.milestone, here
WHERE
    best <= present
    AND (getvariable('start') IS NULL OR best >= getvariable('start')::DOUBLE)
    AND (getvariable('min_support') IS NULL OR support >= getvariable('min_support')::DOUBLE)
    AND (getvariable('category') IS NULL OR category = getvariable('category')::VARCHAR)
WINDOW w AS (ORDER BY best, milestone);
COMMENT ON VIEW intervals IS 'Interval series on best dates inside the window; variables present, start, min_support and category choose the record';
COMMENT ON COLUMN intervals.milestone IS 'Id of the milestone that opens the interval';
COMMENT ON COLUMN intervals.title IS 'Its title';
COMMENT ON COLUMN intervals.year IS 'Its best decimal year';
COMMENT ON COLUMN intervals.age IS 'Present minus year, years';
COMMENT ON COLUMN intervals.interval IS 'Years to the next milestone; for the last one to the present';
COMMENT ON COLUMN intervals.next_milestone IS 'Id of the milestone that closes it; empty for the open one';
COMMENT ON COLUMN intervals.open IS 'True for the last interval, which nothing has closed yet';
COMMENT ON COLUMN intervals.support IS 'Independent lists that name the milestone';
COMMENT ON COLUMN intervals.category IS 'Category of the milestone';
COMMENT ON COLUMN intervals.earliest IS 'Earliest decimal year of its dating';
COMMENT ON COLUMN intervals.latest IS 'Latest decimal year of its dating';

CREATE VIEW orders AS
SELECT k.earlier, a.title AS earlier_title, k.later, b.title AS later_title, k.stated_by
FROM ledger.known_order AS k
JOIN ledger.milestone AS a ON a.milestone = k.earlier
JOIN ledger.milestone AS b ON b.milestone = k.later;
COMMENT ON VIEW orders IS 'Known orders between milestones, which the draws respect';
COMMENT ON COLUMN orders.earlier IS 'Id of the milestone that came first';
COMMENT ON COLUMN orders.earlier_title IS 'Its title';
COMMENT ON COLUMN orders.later IS 'Id of the milestone that came after';
COMMENT ON COLUMN orders.later_title IS 'Its title';
COMMENT ON COLUMN orders.stated_by IS 'List or file that states it';

CREATE VIEW runs AS SELECT run, run_at, command, version, seed, draws, record, result FROM ledger.run;
COMMENT ON VIEW runs IS 'Runs of grid and report';
COMMENT ON COLUMN runs.run IS 'Id of the run';
COMMENT ON COLUMN runs.run_at IS 'When, UTC';
COMMENT ON COLUMN runs.command IS 'Command line';
COMMENT ON COLUMN runs.version IS 'Version of the program';
COMMENT ON COLUMN runs.seed IS 'Seed of the random numbers';
COMMENT ON COLUMN runs.draws IS 'Number of draws';
COMMENT ON COLUMN runs.record IS 'Hash of the record that was analysed';
COMMENT ON COLUMN runs.result IS 'Main results, JSON';
