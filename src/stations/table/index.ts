export { type ColumnOverrides, findColumns, quotedList } from './columns.js';
export { DELIMITER_NAMES, type Delimiter } from './delimiter.js';
export type { TableEncoding } from './encoding.js';
export { DEFAULT_MAX_GEOJSON_BYTES } from './geojson-table.js';
export {
  type DecimalMark,
  isNumberProblem,
  LARGEST_NUMBER,
  type NumberProblem,
  parseNumber,
} from './number.js';
export {
  openTable,
  type PlaceMeanings,
  type RowProblem,
  requireColumn,
  requireColumns,
  type Table,
  type TableFormat,
  type TableOptions,
  type TableRow,
} from './open-table.js';
export { safeCell, safeRow } from './safe-cell.js';
export { DEFAULT_MAX_LINE_BYTES } from './text-source.js';
export { headerKey, type MeaningSpec, type Vocabulary, withSuffixes } from './vocabulary.js';
