import assert from "node:assert/strict";
import { columnsInSql } from "../../../pipeline/query/columns_in_sql.ts";
import { namesInSql, refusalOf, sqlTokens } from "../../../pipeline/query/sql_text.ts";

const refusal = (sql: string) => refusalOf(sqlTokens(sql));

Deno.test("a single reading statement is let through", () => {
  const fine = [
    "SELECT 1",
    "select 1;",
    "  -- a remark; with a semicolon\nSELECT ';' /* ; */ ;  -- done",
    "(SELECT 1) UNION ALL (SELECT 2)",
    "WITH a AS (SELECT 1) SELECT * FROM a",
    "FROM guides",
    "VALUES (1)",
    "DESCRIBE guides",
    "SHOW TABLES",
    "SUMMARIZE guides",
    "EXPLAIN ANALYZE SELECT 1",
    "SELECT \"delete\" FROM guides WHERE t = 'drop table x; --'",
    "SELECT $$;$$, $tag$ ; insert $tag$",
    "SELECT E'it\\'s;' AS x",
    'WITH t AS (SELECT 1 AS "update") SELECT * FROM t',
  ];
  for (const sql of fine) assert.equal(refusal(sql), null, sql);
});

Deno.test("a writing statement, several of them, or none are refused", () => {
  const wrong = [
    "INSERT INTO guides VALUES (1)",
    "DELETE FROM guides",
    "UPDATE guides SET x_mm = 1",
    "DROP TABLE guides",
    "CREATE TABLE x (a INT)",
    "COPY guides TO 'x.csv'",
    "ATTACH 'x.db'",
    "PRAGMA database_list",
    "SET threads = 1",
    "CALL something()",
    "EXPLAIN DELETE FROM guides",
    "EXPLAIN ANALYZE INSERT INTO guides VALUES (1)",
    "WITH a AS (SELECT 1) DELETE FROM guides",
    "WITH a AS (SELECT 1) INSERT INTO guides SELECT * FROM a",
    "/* SELECT */ DROP TABLE guides",
    "SELECT 1; SELECT 2",
    "SELECT 1; -- first\nDROP TABLE guides",
    "",
    "  -- nothing",
    ";",
  ];
  for (const sql of wrong) assert.notEqual(refusal(sql), null, sql);
  assert.match(refusal("SELECT 1; SELECT 2")!, /more than one statement/);
  assert.match(refusal("drop table guides")!, /found "drop", need a statement that reads/);
});

Deno.test("names are found in and out of quotes, but not in strings and comments", () => {
  const names = namesInSql(
    sqlTokens(`SELECT "Die Id", g.x FROM Guides g -- walls\nWHERE t = 'modes' /* poling */`),
  );
  for (const name of ["die id", "g", "x", "guides"]) assert.ok(names.has(name), name);
  for (const name of ["walls", "modes", "poling"]) assert.ok(!names.has(name), name);
});

const TABLES = new Set(["guides", "cutback"]);
const columns = (sql: string) => columnsInSql(sqlTokens(sql), TABLES);

Deno.test("a statement that names its columns needs no others", () => {
  const named = [
    "SELECT die_id, count(*) FROM guides GROUP BY die_id",
    "SELECT g.die_id FROM guides AS g JOIN cutback c ON c.guide_id = g.guide_id WHERE c.value > 1",
    "WITH a AS (SELECT die_id FROM guides) SELECT a.die_id FROM a",
    'SELECT "guides"."die_id" FROM "guides"',
  ];
  for (const sql of named) assert.ok(columns(sql)?.has("die_id"), sql);
});

Deno.test("a statement that may use columns it does not name gets them all", () => {
  const unnamed = [
    "SELECT * FROM guides",
    "SELECT g.* FROM guides g",
    "SELECT count(*), * FROM guides",
    "SELECT COLUMNS('x.*') FROM guides",
    "SELECT die_id FROM guides NATURAL JOIN cutback",
    "FROM guides",
    "SELECT a FROM (FROM guides) AS a",
    "SELECT guides FROM guides",
    "SELECT count(DISTINCT c) FROM cutback c",
    "SELECT count(DISTINCT c) FROM cutback AS c",
    "SELECT die_id, guides FROM guides",
    "SELECT c IS NULL FROM guides g LEFT JOIN cutback c ON c.guide_id = g.guide_id",
    "SUMMARIZE guides",
    "SELECT die_id FROM guides, cutback",
  ];
  for (const sql of unnamed) assert.equal(columns(sql), null, sql);
});
