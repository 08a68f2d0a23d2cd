-- What each group of traits at its target would bring the dies of a wafer, by request: dies that can be shipped, accepted as
-- made, accepted with the group at its target (accepted dies stay accepted), and the same as sums of probabilities. A die is
-- what its analysed guide is; dies without one are accepted as made.
WITH gains AS (
  SELECT
    lot,
    request,
    wafer,
    trait_group,
    count(*) AS analysed,
    count(*) FILTER (WHERE decision_restored = 'accept') AS gained,
    sum(probability_restored - probability_as_made) AS expected_gain
  FROM ledger.restored
  GROUP BY ALL
), made AS (
  SELECT
    lot,
    request,
    wafer,
    count(DISTINCT die_id) AS dies
  FROM ledger.decisions
  WHERE unavailable IS NULL
  GROUP BY ALL
)
SELECT
  gains.lot,
  gains.request,
  gains.wafer,
  gains.trait_group,
  made.dies,
  made.dies - gains.analysed AS accepted_as_made,
  made.dies - gains.analysed + gains.gained AS accepted_restored,
  gains.expected_gain
FROM gains
JOIN made ON made.lot = gains.lot AND made.request = gains.request AND made.wafer = gains.wafer
