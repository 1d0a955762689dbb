-- SPDX-License-Identifier: Apache-2.0
-- question: Which milestones follow one another most closely?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
--   start = NULL: only milestones from this decimal year on
--   rows = 20: rows shown at most
-- columns:
--   milestone: id of the milestone
--   title: its title
--   year: its best decimal year
--   next_title: the next milestone
--   next_year: its best decimal year
--   interval: years between them
--   swappable: true where their datings overlap, so that the order may be the other
SELECT i.milestone, i.title, i.year, p.title AS next_title, p.best AS next_year, i.interval, p.earliest < i.latest AS swappable
FROM intervals AS i JOIN milestones AS p ON p.milestone = i.next_milestone
ORDER BY i.interval, i.year, i.milestone
LIMIT coalesce(getvariable('rows')::BIGINT, 20)
