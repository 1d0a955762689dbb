-- SPDX-License-Identifier: Apache-2.0
-- question: Where do lists date the same event differently, and by how much?
-- parameters:
--   at_least = 0: difference of the best years, in years, at least
--   rows = 20: rows shown at most
-- columns:
--   milestone: id of the milestone
--   title: its title
--   source_a: name of the first list
--   date_a: date as it writes it
--   source_b: name of the second list
--   date_b: date as it writes it
--   difference: second best year minus first, years
--   gap: years between the two datings where they share none, else 0
SELECT milestone, title, source_a, date_a, source_b, date_b, difference, gap
FROM disagreement
WHERE abs(difference) >= coalesce(getvariable('at_least')::DOUBLE, 0)
ORDER BY abs(difference) DESC, milestone, source_a, source_b, date_a, date_b, difference, gap
LIMIT coalesce(getvariable('rows')::BIGINT, 20)
