-- SPDX-License-Identifier: Apache-2.0
-- The analyst's questions, one line each. Like the views they follow the variable present.
-- Each window has a name of its own: DuckDB 1.4 takes two of one name in a script for one defined twice.

CREATE VIEW epochs AS
WITH aged AS (
    SELECT p.milestone, p.support, greatest(floor(log10(greatest(present_year() - p.best, 1.0))), 0)::INTEGER AS epoch
    FROM ledger.milestone AS p
    WHERE p.best <= present_year()
)
SELECT
    epoch, CASE WHEN epoch = 0 THEN 0.0 ELSE pow(10.0, epoch) END AS age_from, pow(10.0, epoch + 1) AS age_to,
    count(*) AS milestones, count(*) FILTER (WHERE support = 1) AS single, count(*) FILTER (WHERE support > 1) AS shared,
    avg(support) AS mean_support, max(support) AS max_support
FROM aged
GROUP BY epoch;
COMMENT ON VIEW epochs IS 'Support by epoch, an epoch being a decade of age: how many lists remember what, and how far back';
COMMENT ON COLUMN epochs.epoch IS 'Power of ten of the age in years; 0 holds all ages under 10 years';
COMMENT ON COLUMN epochs.age_from IS 'Youngest age of the epoch, years';
COMMENT ON COLUMN epochs.age_to IS 'Age at which the epoch ends, years, itself not included';
COMMENT ON COLUMN epochs.milestones IS 'Milestones of that age';
COMMENT ON COLUMN epochs.single IS 'Of these, named by one independent list';
COMMENT ON COLUMN epochs.shared IS 'Of these, named by several';
COMMENT ON COLUMN epochs.mean_support IS 'Mean number of independent lists that name one';
COMMENT ON COLUMN epochs.max_support IS 'Largest number of independent lists that name one';

CREATE VIEW overlap AS
WITH named AS (
    SELECT DISTINCT e.source, m.milestone FROM ledger.member AS m JOIN ledger.entry AS e ON e.entry = m.entry
),
sizes AS (
    SELECT s.source, s.name, count(n.milestone) AS milestones
    FROM ledger.source AS s LEFT JOIN named AS n ON n.source = s.source GROUP BY s.source, s.name
),
both_name AS (
    SELECT a.source AS a, b.source AS b, count(*) AS shared
    FROM named AS a JOIN named AS b ON b.milestone = a.milestone AND a.source < b.source GROUP BY a.source, b.source
)
SELECT
    a.name AS source_a, b.name AS source_b, a.milestones AS milestones_a, b.milestones AS milestones_b,
    coalesce(c.shared, 0) AS shared,
    coalesce(c.shared, 0) / nullif(a.milestones + b.milestones - coalesce(c.shared, 0), 0)::DOUBLE AS jaccard,
    (a.milestones + 1.0) * (b.milestones + 1.0) / (coalesce(c.shared, 0) + 1.0) - 1.0 AS chapman
FROM sizes AS a
JOIN sizes AS b ON a.source < b.source
LEFT JOIN both_name AS c ON c.a = a.source AND c.b = b.source;
COMMENT ON VIEW overlap IS 'Every pair of lists: what both name';
COMMENT ON COLUMN overlap.source_a IS 'Name of the first list';
COMMENT ON COLUMN overlap.source_b IS 'Name of the second list';
COMMENT ON COLUMN overlap.milestones_a IS 'Milestones the first list names';
COMMENT ON COLUMN overlap.milestones_b IS 'Milestones the second list names';
COMMENT ON COLUMN overlap.shared IS 'Milestones both name';
COMMENT ON COLUMN overlap.jaccard IS 'Shared over all that either names, 0 to 1';
COMMENT ON COLUMN overlap.chapman IS 'Chapman''s estimate of all there were, had both lists picked independently and evenly';

CREATE VIEW disagreement AS
SELECT
    a.milestone, a.milestone_title AS title, a.source AS source_a, a.date_text AS date_a, a.best AS best_a,
    b.source AS source_b, b.date_text AS date_b, b.best AS best_b, b.best - a.best AS difference,
    greatest(b.earliest - a.latest, a.earliest - b.latest, 0.0) AS gap
FROM members AS a
JOIN members AS b ON b.milestone = a.milestone AND a.entry < b.entry;
COMMENT ON VIEW disagreement IS 'Every two datings of one milestone, and how far apart they lie';
COMMENT ON COLUMN disagreement.milestone IS 'Id of the milestone';
COMMENT ON COLUMN disagreement.title IS 'Its title';
COMMENT ON COLUMN disagreement.source_a IS 'Name of the first list';
COMMENT ON COLUMN disagreement.date_a IS 'Date as the first list writes it';
COMMENT ON COLUMN disagreement.best_a IS 'Its best decimal year';
COMMENT ON COLUMN disagreement.source_b IS 'Name of the second list';
COMMENT ON COLUMN disagreement.date_b IS 'Date as the second list writes it';
COMMENT ON COLUMN disagreement.best_b IS 'Its best decimal year';
COMMENT ON COLUMN disagreement.difference IS 'Second best year minus first, years';
COMMENT ON COLUMN disagreement.gap IS 'Years between the two datings where they share none, else 0';

CREATE VIEW gaps AS
SELECT
    row_number() OVER (ORDER BY i.interval DESC, i.milestone) AS rank, i.milestone, i.title, i.year,
    i.next_milestone, p.title AS next_title, p.best AS next_year, i.interval,
    i.interval / nullif(median(i.interval) OVER (), 0) AS times_median
FROM intervals AS i
JOIN ledger.milestone AS p ON p.milestone = i.next_milestone;
COMMENT ON VIEW gaps IS 'Closed intervals, the longest first: where nothing is listed';
COMMENT ON COLUMN gaps.rank IS '1 is the longest';
COMMENT ON COLUMN gaps.milestone IS 'Id of the milestone before the gap';
COMMENT ON COLUMN gaps.title IS 'Its title';
COMMENT ON COLUMN gaps.year IS 'Its best decimal year';
COMMENT ON COLUMN gaps.next_milestone IS 'Id of the milestone after the gap';
COMMENT ON COLUMN gaps.next_title IS 'Its title';
COMMENT ON COLUMN gaps.next_year IS 'Its best decimal year';
COMMENT ON COLUMN gaps.interval IS 'Length of the gap, years';
COMMENT ON COLUMN gaps.times_median IS 'Length over the median interval; empty when that is 0';

CREATE MACRO entries_of(list_name) AS TABLE SELECT * FROM entries WHERE source = list_name ORDER BY best, entry;
COMMENT ON MACRO TABLE entries_of IS 'Entries of one list, oldest first: FROM entries_of(''name'')';

CREATE MACRO present_of(list_name) AS coalesce(
    getvariable('present')::DOUBLE, (SELECT max(compiled) + 1.0 FROM ledger.source WHERE name = list_name), present_year()
);
COMMENT ON MACRO present_of IS 'The present of one list: variable present, else the end of its compile year, else that of the timeline';

CREATE MACRO intervals_of(list_name) AS TABLE
SELECT
    entry, title, best AS year, present_of(list_name) - best AS age, lead(best, 1, present_of(list_name)) OVER by_list - best AS interval,
    lead(entry) OVER by_list AS next_entry, lead(entry) OVER by_list IS NULL AS open
FROM entries
WHERE source = list_name AND best <= present_of(list_name) AND (getvariable('start') IS NULL OR best >= getvariable('start')::DOUBLE)
WINDOW by_list AS (ORDER BY best, entry)
ORDER BY year, entry;
COMMENT ON MACRO TABLE intervals_of IS 'Interval series of one list on its own dates: FROM intervals_of(''name'')';

CREATE MACRO intervals_at_support(least_support) AS TABLE
SELECT
    milestone, title, best AS year, present_year() - best AS age, lead(best, 1, present_year()) OVER by_support - best AS interval,
    lead(milestone) OVER by_support AS next_milestone, lead(milestone) OVER by_support IS NULL AS open, support
FROM ledger.milestone
WHERE support >= least_support AND best <= present_year() AND (getvariable('start') IS NULL OR best >= getvariable('start')::DOUBLE)
WINDOW by_support AS (ORDER BY best, milestone)
ORDER BY year, milestone;
COMMENT ON MACRO TABLE intervals_at_support IS 'Interval series of milestones that so many independent lists name: FROM intervals_at_support(2)';

CREATE MACRO intervals_in(wanted) AS TABLE
SELECT
    milestone, title, best AS year, present_year() - best AS age, lead(best, 1, present_year()) OVER by_category - best AS interval,
    lead(milestone) OVER by_category AS next_milestone, lead(milestone) OVER by_category IS NULL AS open, support
FROM ledger.milestone
WHERE category = wanted AND best <= present_year() AND (getvariable('start') IS NULL OR best >= getvariable('start')::DOUBLE)
WINDOW by_category AS (ORDER BY best, milestone)
ORDER BY year, milestone;
COMMENT ON MACRO TABLE intervals_in IS 'Interval series of one category: FROM intervals_in(''name'')';

CREATE MACRO milestone_members(wanted) AS TABLE SELECT * FROM members WHERE milestone = wanted ORDER BY best, entry;
COMMENT ON MACRO TABLE milestone_members IS 'Entries of one milestone: FROM milestone_members(12)';
