-- One row per domain wall, with its own line in its file. The ledger keeps unbroken runs of walls as lists.
SELECT
  lot,
  wafer,
  die_id,
  guide_id,
  unnest(positions_um) AS position_um,
  file_name,
  source_file,
  unnest(range(source_line, source_line + len(positions_um))) AS source_line,
  run
FROM ledger.walls
