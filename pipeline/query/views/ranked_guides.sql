-- Every predicted guide of every request: its decision, how many guides of its die qualify, and whether the die can be
-- shipped at all. A guide qualifies when it is accepted.
SELECT
  decisions.*,
  decisions.unavailable IS NULL AS available,
  count(*) FILTER (WHERE decisions.decision = 'accept')
    OVER (PARTITION BY decisions.request, decisions.die_id) AS qualifying_guides,
  count(*) OVER (PARTITION BY decisions.request, decisions.die_id) AS guides_of_die
FROM ledger.decisions AS decisions
