-- One row per domain wall. The ledger keeps one row per guide and file, with lists.
SELECT
  lot,
  guide_id,
  unnest(position_um) AS position_um,
  file_name,
  source_file,
  unnest(source_line) AS source_line,
  run
FROM ledger.walls
