-- SPDX-License-Identifier: Apache-2.0
-- question: How many milestones fall into each decade of age, and how many a year is that?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
--   start = NULL: only milestones from this decimal year on
--   min_support = NULL: only milestones named by so many independent lists
--   category = NULL: only milestones of this category
-- columns:
--   epoch: power of ten of the age in years, 0 for all under 10 years
--   age_from: youngest age, years
--   age_to: age at which it ends, years
--   milestones: milestones of that age
--   per_year: milestones per year of it
--   cumulative: milestones of that age and younger
WITH counted AS (
    SELECT greatest(floor(log10(greatest(age, 1.0))), 0)::INTEGER AS epoch, count(*) AS milestones
    FROM intervals
    GROUP BY epoch
)
SELECT
    epoch, CASE WHEN epoch = 0 THEN 0.0 ELSE pow(10.0, epoch) END AS age_from, pow(10.0, epoch + 1) AS age_to, milestones,
    milestones / (pow(10.0, epoch + 1) - CASE WHEN epoch = 0 THEN 0.0 ELSE pow(10.0, epoch) END) AS per_year,
    sum(milestones) OVER (ORDER BY epoch)::BIGINT AS cumulative
FROM counted
ORDER BY epoch
