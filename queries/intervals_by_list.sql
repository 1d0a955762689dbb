-- SPDX-License-Identifier: Apache-2.0
-- question: How long is it from each entry of a list to the next, list by list, on the list's own dates?
-- parameters:
--   present = NULL: the present, decimal year; the end of each list's own compile year without it
--   list = NULL: name of a list; all lists without it
-- columns:
--   source: name of the list
--   entry: id of the entry that opens the interval
--   title: its title
--   year: its best decimal year
--   age: years before the present
--   interval: years to the next of the same list, for the last one to the present
--   next_entry: id of the next, empty for the last
--   open: true for the last of its list
SELECT
    source, entry, title, best AS year, present - best AS age, lead(best, 1, present) OVER w - best AS interval,
    lead(entry) OVER w AS next_entry, lead(entry) OVER w IS NULL AS open
FROM (
    SELECT e.source, e.entry, e.title, e.best, coalesce(getvariable('present')::DOUBLE, s.compiled + 1.0, present_year()) AS present
    FROM entries AS e JOIN sources AS s ON s.source = e.source
)
WHERE best <= present AND source = coalesce(getvariable('list')::VARCHAR, source)
WINDOW w AS (PARTITION BY source ORDER BY best, entry)
ORDER BY source, year, entry
