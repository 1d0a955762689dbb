-- SPDX-License-Identifier: Apache-2.0
-- question: Where is nothing listed for longest?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
--   start = NULL: only milestones from this decimal year on
--   rows = 20: rows shown at most
-- columns:
--   rank: 1 is the longest
--   title: milestone before the gap
--   year: its best decimal year
--   next_title: milestone after the gap
--   next_year: its best decimal year
--   interval: length of the gap, years
--   times_median: length over the median interval
SELECT rank, title, year, next_title, next_year, interval, times_median
FROM gaps
ORDER BY rank
LIMIT coalesce(getvariable('rows')::BIGINT, 20)
