-- SPDX-License-Identifier: Apache-2.0
-- question: Which entries does a list hold, oldest first?
-- parameters:
--   list = NULL: name of a list; all lists without it
-- columns:
--   source: name of the list
--   entry: id of the entry
--   title: title as loaded
--   date_text: date as the compiler wrote it
--   earliest: earliest decimal year
--   best: best decimal year
--   latest: latest decimal year
--   shape: uniform or normal
--   notation: notation that read the date
--   row: row number in the file
SELECT source, entry, title, date_text, earliest, best, latest, shape, notation, row
FROM entries
WHERE source = coalesce(getvariable('list')::VARCHAR, source)
ORDER BY source, best, entry
