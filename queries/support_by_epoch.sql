-- SPDX-License-Identifier: Apache-2.0
-- question: How many lists remember what, and how far back?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
-- columns:
--   epoch: power of ten of the age in years, 0 for all under 10 years
--   age_from: youngest age, years
--   age_to: age at which it ends, years
--   milestones: milestones of that age
--   single: of these, named by one independent list
--   shared: of these, named by several
--   shared_fraction: shared over milestones
--   mean_support: mean number of independent lists
SELECT epoch, age_from, age_to, milestones, single, shared, shared / milestones::DOUBLE AS shared_fraction, mean_support
FROM epochs
ORDER BY epoch
