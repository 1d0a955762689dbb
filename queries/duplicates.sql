-- SPDX-License-Identifier: Apache-2.0
-- question: Which entries of a list repeat an earlier one?
-- parameters:
--   list = NULL: name of a list; all lists without it
-- columns:
--   source: name of the list
--   title: title as loaded
--   date_text: date as written
--   row: row number in the file
--   nth: which of the entries with this title
--   entry: id of the entry
SELECT source, title, date_text, row, nth, entry
FROM entries
WHERE duplicate AND source = coalesce(getvariable('list')::VARCHAR, source)
ORDER BY source, title, nth
