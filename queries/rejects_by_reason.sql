-- SPDX-License-Identifier: Apache-2.0
-- question: Why were rows refused, and where is the first of each kind?
-- parameters:
--   list = NULL: name of a list; all lists without it
-- columns:
--   source: name of the list
--   reason: why, with what stands in quotes left out
--   rows: rows refused for it
--   first_row: row number of the first
--   example: the first such row as it stood
SELECT
    source, regexp_replace(reason, '''[^'']*''|"[^"]*"', '...', 'g') AS reason, count(*) AS rows,
    min(row) AS first_row, arg_min(raw, row) AS example
FROM rejects
WHERE source = coalesce(getvariable('list')::VARCHAR, source)
GROUP BY ALL
ORDER BY rows DESC, source, reason
