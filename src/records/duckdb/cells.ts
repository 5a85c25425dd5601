/** What a cell says, as SQL over whole columns and, for the few cells SQL can't settle, in the language itself. */

/** Texts that mean nothing was recorded, in a column of numbers. */
const MISSING_WORDS = new Set(['', 'na', 'n/a', 'nan', 'null', '.'])

const MISSING_SQL = ['NA', 'N/A', 'NaN', 'null', '.', 'na', 'n/a', 'nan', 'Null', 'NULL', 'NAN'].map(
  (word) => `'${word}'`,
)
const TRUTH_SQL = ['true', 'false', 'TRUE', 'FALSE', 'True', 'False'].map((word) => `'${word}'`)

/** The number a text stands for: NaN where it means missing, undefined where it is no finite number. */
export function numberOfText(text: string): number | undefined {
  const word = text.trim().toLowerCase()
  if (MISSING_WORDS.has(word)) return Number.NaN
  return word === 'true' ? 1 : word === 'false' ? 0 : undefined
}

/** How to write a number that was written some other way. */
export function numberAdvice(text: string): string {
  const plain = text.trim()
  if (/^[+-]?\d{1,3}(,\d{3})+(\.\d*)?$/.test(plain)) return `write ${plain.replaceAll(',', '')}, without commas`
  if (/^[+-]?\d{1,3}(\.\d{3})*,\d+$/.test(plain) || /^[+-]?\d+,\d+$/.test(plain))
    return `write ${plain.replaceAll('.', '').replace(',', '.')}, with a decimal point`
  if (Number.isNaN(Number(plain)) === false) return 'write a finite number, or leave the cell empty'
  return 'write a number, or leave the cell empty'
}

/** How a column of typed files can be used. */
export type Use = 'number' | 'exact' | 'truth' | 'text' | 'time' | 'other'

/** type: as DuckDB describes it. `exact` numbers go through their text, so that rounding happens once. */
export function useOf(type: string): Use {
  if (/^(TINYINT|SMALLINT|INTEGER|UTINYINT|USMALLINT|UINTEGER|FLOAT|DOUBLE)$/.test(type)) return 'number'
  if (/^(BIGINT|UBIGINT|HUGEINT|UHUGEINT|DECIMAL\(\d+,\d+\))$/.test(type)) return 'exact'
  if (type === 'BOOLEAN') return 'truth'
  if (/^(VARCHAR|UUID|ENUM\(.*\))$/.test(type)) return 'text'
  if (/^(DATE|TIME|TIMESTAMP.*)$/.test(type)) return 'time'
  return 'other'
}

/** A DOUBLE, NULL where there is no number. */
export function numberSql(column: string, type: string): string {
  const use = useOf(type)
  if (use === 'text' || use === 'exact') return `TRY_CAST(CAST(${column} AS VARCHAR) AS DOUBLE)`
  return `CAST(${column} AS DOUBLE)`
}

/** The text of a number: whole numbers without decimals. */
export function shortestSql(number: string): string {
  return `CASE WHEN ${number} = trunc(${number}) AND abs(${number}) < 1e15
    THEN CAST(CAST(${number} AS BIGINT) AS VARCHAR) ELSE CAST(${number} AS VARCHAR) END`
}

/** A VARCHAR: text as written, numbers shortest, dates and times in ISO 8601. */
export function labelSql(column: string, type: string): string {
  if (type === 'FLOAT' || type === 'DOUBLE')
    return `CASE WHEN isnan(${column}) THEN NULL ELSE ${shortestSql(column)} END`
  if (type.startsWith('DECIMAL')) {
    const text = `CAST(${column} AS VARCHAR)`
    return type.endsWith(',0)') ? text : `rtrim(rtrim(${text}, '0'), '.')`
  }
  if (type.startsWith('TIMESTAMP')) return `replace(CAST(${column} AS VARCHAR), ' ', 'T')`
  return `CAST(${column} AS VARCHAR)`
}

/** Bits of `kindsSql`. */
const WHOLE = 1
const DECIMAL = 2
const TRUTH = 4
const DAY = 8
const MOMENT = 16
const TEXT = 32
/** More digits than a double holds for sure. */
const LONG = 64

/** Which kinds of value a column of texts holds, as a sum of bits. Leading zeros ("00123") make a text. */
export function kindsSql(column: string): string {
  return `CAST(coalesce(bit_or(CASE
    WHEN ${column} IS NULL OR ${column} IN (${MISSING_SQL.join(', ')}) THEN 0
    WHEN TRY_CAST(${column} AS DOUBLE) IS NOT NULL THEN CASE
      WHEN NOT isfinite(TRY_CAST(${column} AS DOUBLE)) OR regexp_matches(${column}, '^\\s*[+-]?0[0-9]') THEN ${TEXT}
      WHEN NOT regexp_full_match(${column}, '\\s*[+-]?[0-9]{1,18}\\s*') THEN ${DECIMAL}
      WHEN length(${column}) > 15 THEN ${LONG} ELSE ${WHOLE} END
    WHEN ${column} IN (${TRUTH_SQL.join(', ')}) THEN ${TRUTH}
    WHEN TRY_CAST(${column} AS DATE) IS NOT NULL AND length(${column}) <= 10 THEN ${DAY}
    WHEN TRY_CAST(${column} AS TIMESTAMP) IS NOT NULL THEN ${MOMENT}
    ELSE ${TEXT} END), 0) AS INTEGER)`
}

/** The type that holds all values of the kinds found. */
export function typeOfKinds(kinds: number): string {
  const isWithin = (allowed: number) => kinds !== 0 && (kinds & ~allowed) === 0
  if (isWithin(WHOLE | LONG)) return 'BIGINT'
  if (isWithin(WHOLE | LONG | DECIMAL)) return 'DOUBLE'
  if (isWithin(TRUTH)) return 'BOOLEAN'
  if (isWithin(DAY)) return 'DATE'
  if (isWithin(DAY | MOMENT)) return 'TIMESTAMP'
  return 'VARCHAR'
}

/** Whether every value is a number that a double holds, so that nothing is lost by reading the column as numbers. */
export function isNumberKinds(kinds: number): boolean {
  return (kinds & ~(WHOLE | DECIMAL)) === 0
}

/** A column of texts in its natural type, for conditions. Missing words are NULL unless the column is text. */
export function naturalSql(column: string, type: string): string {
  if (type === 'VARCHAR') return column
  if (type === 'DOUBLE') return `nullif(TRY_CAST(${column} AS DOUBLE), CAST('nan' AS DOUBLE))`
  return `TRY_CAST(${column} AS ${type})`
}
