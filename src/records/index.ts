/** Door of the records room: tables as typed columns, and the ledger. Reading files is behind `files.ts`, for Node alone. */
export { type LedgerStep, ledgerStep } from './ledger.js'
export {
  type Column,
  type LabelColumn,
  labelsOf,
  type NumberColumn,
  numbersOf,
  type Table,
  type WantedColumn,
} from './table.js'
