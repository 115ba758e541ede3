#!/usr/bin/env bash
# Reads the table of members of a small ensemble with two other implementations of
# Parquet, and compares what they find with the CSV of the same members. Needs node
# and npm.
set -euo pipefail
cd "$(dirname "$0")/../.."
command -v npm >/dev/null 2>&1 || { echo "readers: npm is missing"; [ -n "${CI:-}" ] && exit 1 || exit 0; }
R=$(mktemp -d)
trap 'rm -rf "$R"' EXIT
go run ./cmd/cycle ensemble earth_uncertain --members 300 --seed 4 --csv --out "$R/e" --quiet
cd "$R"
npm init -y >/dev/null
npm install --no-audit --no-fund hyparquet@^1 hyparquet-compressors @duckdb/node-api >npm.log 2>&1 || { cat npm.log; exit 1; }
cat >check.mjs <<'JS'
import { readFileSync } from 'node:fs'
import { parquetMetadata, parquetReadObjects } from 'hyparquet'
import { compressors } from 'hyparquet-compressors'
import { DuckDBInstance } from '@duckdb/node-api'

const lines = readFileSync('e/members.csv', 'utf8').trim().split('\n').map(l => l.split(','))
const head = lines.shift()
let failed = 0
const fail = m => { failed++; if (failed < 10) console.log('FAIL', m) }
const same = (got, want) => want === '' ? got === null || got === undefined :
  typeof got === 'string' ? got === want : Number(got) === Number(want)
const check = (who, rows) => {
  if (rows.length !== lines.length) fail(`${who}: ${rows.length} rows instead of ${lines.length}`)
  rows.forEach((r, i) => head.forEach((c, j) => { if (!same(r[c], lines[i][j])) fail(`${who}: member ${i}, ${c}: ${r[c]} instead of ${lines[i][j]}`) }))
  console.log(`${who}: ${rows.length} rows of ${Object.keys(rows[0]).length} columns`)
}

const b = readFileSync('e/members.parquet')
const file = b.buffer.slice(b.byteOffset, b.byteOffset + b.byteLength)
check('hyparquet', await parquetReadObjects({ file, compressors }))
const meta = Object.fromEntries(parquetMetadata(file).key_value_metadata.map(k => [k.key, k.value]))
for (const [k, v] of [['unit.outcome_age_Gyr', 'Gyr'], ['unit.weathering_land_efold_K', 'K'], ['key.weathering_land_efold_K', 'weathering.land.efold'], ['seed', '4']])
  if (meta[k] !== v) fail(`metadata ${k}: ${meta[k]}`)

const db = await (await DuckDBInstance.create()).connect()
const rows = (await db.runAndReadAll("select * from 'e/members.parquet' order by member")).getRowObjects()
check('duckdb', rows)
const units = (await db.runAndReadAll("select value from parquet_kv_metadata('e/members.parquet') where key::varchar = 'unit.outcome_age_Gyr'")).getRowObjects()
if (units.length !== 1) fail('duckdb: no units')
console.log(`${failed === 0 ? 2 : 0} passed, ${failed} failed`)
process.exit(failed ? 1 : 0)
JS
node check.mjs
