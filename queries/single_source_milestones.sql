-- SPDX-License-Identifier: Apache-2.0
-- question: Which milestones does one list alone name?
-- parameters:
--   list = NULL: name of a list; all lists without it
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
-- columns:
--   milestone: id of the milestone
--   title: its title
--   source: name of the list
--   best: best decimal year
--   age: years before the present
--   importance: importance it states
SELECT milestone, title, sources AS source, best, present_year() - best AS age, importance
FROM milestones
WHERE entries = 1 AND sources = coalesce(getvariable('list')::VARCHAR, sources)
ORDER BY best, milestone
