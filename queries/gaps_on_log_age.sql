-- SPDX-License-Identifier: Apache-2.0
-- question: Where is the jump in age largest, as a ratio of ages?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
--   start = NULL: only milestones from this decimal year on
--   rows = 20: rows shown at most
-- columns:
--   milestone: id of the milestone before the jump
--   title: its title
--   year: its best decimal year
--   age: its age, years
--   next_age: age of the next, years
--   ratio: age over next age
SELECT milestone, title, year, age, age - interval AS next_age, age / (age - interval) AS ratio
FROM intervals
WHERE NOT open AND age > interval
ORDER BY ratio DESC, milestone
LIMIT coalesce(getvariable('rows')::BIGINT, 20)
