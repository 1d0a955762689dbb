-- SPDX-License-Identifier: Apache-2.0
-- question: Does one list date events earlier than another as a rule?
-- parameters:
--   least_shared = 3: datings in common at least
-- columns:
--   source_a: name of the first list
--   source_b: name of the second list
--   shared: datings of the same milestones
--   earlier_in_a: of these, earlier in the first list
--   earlier_in_b: of these, earlier in the second list
--   median_difference: median of second best year minus first, years
--   disjoint: datings that share no year
SELECT
    source_a, source_b, count(*) AS shared, count(*) FILTER (WHERE difference > 0) AS earlier_in_a,
    count(*) FILTER (WHERE difference < 0) AS earlier_in_b, median(difference) AS median_difference, count(*) FILTER (WHERE gap > 0) AS disjoint
FROM (
    SELECT
        least(source_a, source_b) AS source_a, greatest(source_a, source_b) AS source_b,
        CASE WHEN source_a <= source_b THEN difference ELSE -difference END AS difference, gap
    FROM disagreement
)
GROUP BY source_a, source_b
HAVING count(*) >= coalesce(getvariable('least_shared')::BIGINT, 3)
ORDER BY source_a, source_b
