-- SPDX-License-Identifier: Apache-2.0
-- question: Which date notations do the lists use?
-- parameters:
--   list = NULL: name of a list; all lists without it
-- columns:
--   source: name of the list
--   notation: notation
--   entries: entries it read
--   oldest: best decimal year of the oldest
--   youngest: best decimal year of the youngest
--   median_width: median width of the datings, years
SELECT source, notation, count(*) AS entries, min(best) AS oldest, max(best) AS youngest, median(latest - earliest) AS median_width
FROM entries
WHERE source = coalesce(getvariable('list')::VARCHAR, source)
GROUP BY source, notation
ORDER BY source, entries DESC, notation
