-- SPDX-License-Identifier: Apache-2.0
-- question: What do any two lists share, epoch by epoch?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
-- columns:
--   source_a: name of the first list
--   source_b: name of the second list
--   epoch: power of ten of the age in years, 0 for all under 10 years
--   either: milestones of that age that either names
--   shared: milestones of that age that both name
--   jaccard: shared over either
WITH named AS (
    SELECT DISTINCT m.source, m.milestone, greatest(floor(log10(greatest(present_year() - p.best, 1.0))), 0)::INTEGER AS epoch
    FROM members AS m JOIN milestones AS p ON p.milestone = m.milestone
    WHERE p.best <= present_year()
),
pairs AS (
    SELECT a.source AS source_a, b.source AS source_b, n.epoch, n.milestone, count(*) AS times
    FROM sources AS a
    JOIN sources AS b ON a.source < b.source
    JOIN named AS n ON n.source IN (a.source, b.source)
    GROUP BY a.source, b.source, n.epoch, n.milestone
)
SELECT
    source_a, source_b, epoch, count(*) AS either, count(*) FILTER (WHERE times = 2) AS shared,
    count(*) FILTER (WHERE times = 2) / count(*)::DOUBLE AS jaccard
FROM pairs
GROUP BY source_a, source_b, epoch
ORDER BY source_a, source_b, epoch
