-- SPDX-License-Identifier: Apache-2.0
-- question: Which milestones do most lists name?
-- parameters:
--   min_support = 1: independent lists at least
--   category = NULL: only milestones of this category
-- columns:
--   milestone: id of the milestone
--   title: its title
--   support: independent lists that name it
--   sources: names of these lists
--   earliest: earliest decimal year
--   best: best decimal year
--   latest: latest decimal year
SELECT milestone, title, support, sources, earliest, best, latest
FROM milestones
WHERE
    support >= coalesce(getvariable('min_support')::DOUBLE, 1)
    AND (getvariable('category') IS NULL OR category = getvariable('category')::VARCHAR)
ORDER BY support DESC, best, milestone
