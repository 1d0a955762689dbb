-- SPDX-License-Identifier: Apache-2.0
-- question: How long is it from each milestone to the next, on best dates?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
--   start = NULL: only milestones from this decimal year on
--   min_support = NULL: only milestones named by so many independent lists
--   category = NULL: only milestones of this category
-- columns:
--   milestone: id of the milestone that opens the interval
--   title: its title
--   year: its best decimal year
--   age: years before the present
--   interval: years to the next, for the last one to the present
--   next_milestone: id of the next, empty for the last
--   open: true for the last
SELECT milestone, title, year, age, interval, next_milestone, open
FROM intervals
ORDER BY year, milestone
