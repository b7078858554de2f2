import { safeRow } from '../../stations/index.js';
import { type AreaColumnsFor, type AreaValue, areaCell, areaColumns } from './area-columns.js';
import type { AreaFormat } from './area-options.js';
import type { AreaFeature } from './areas-file.js';

/** Text of an output, piece by piece: start, one piece a feature, end. */
export interface AreaWriter {
  start(): string;
  row(feature: AreaFeature, added: readonly AreaValue[]): string;
  end(): string;
}

export function createAreaWriter(
  format: AreaFormat,
  features: readonly AreaFeature[],
  columnsFor: AreaColumnsFor,
): AreaWriter {
  return format === 'csv' ? csvWriter(features, columnsFor) : geojsonWriter(features, columnsFor);
}

/** RFC 7946: features as they came, with properties added. */
function geojsonWriter(features: readonly AreaFeature[], columnsFor: AreaColumnsFor): AreaWriter {
  const columns = areaColumns(columnsFor);
  const kept = keptNames(propertyNames(features), columns);
  let separator = '';
  return {
    start: () => '{"type":"FeatureCollection","features":[',
    row({ id, geometry, properties }, added) {
      const own = Object.entries(properties).map(([name, value]) => [kept.get(name) ?? name, value]);
      const feature = {
        type: 'Feature',
        ...(id === undefined ? {} : { id }),
        geometry,
        properties: Object.fromEntries([...own, ...columns.map((name, i) => [name, added[i]])]),
      };
      const text = `${separator}\n${JSON.stringify(feature)}`;
      separator = ',';
      return text;
    },
    end: () => '\n]}\n',
  };
}

/** RFC 4180: one row a feature, its id where one has any, and the properties that are plain values. */
function csvWriter(features: readonly AreaFeature[], columnsFor: AreaColumnsFor): AreaWriter {
  const columns = areaColumns(columnsFor);
  const names = propertyNames(features).filter((name) =>
    features.some(({ properties }) => isPlain(properties[name])),
  );
  const withId = features.some(({ id }) => id !== undefined);
  const kept = keptNames(names, withId ? [...columns, 'id'] : columns);
  return {
    start: () =>
      safeRow([...(withId ? ['id'] : []), ...names.map((name) => kept.get(name) ?? name), ...columns]),
    row: ({ id, properties }, added) =>
      safeRow([
        ...(withId ? [String(id ?? '')] : []),
        ...names.map((name) => (isPlain(properties[name]) ? String(properties[name]) : '')),
        ...columns.map((name, i) => areaCell(name, added[i])),
      ]),
    end: () => '',
  };
}

function propertyNames(features: readonly AreaFeature[]): string[] {
  return [...new Set(features.flatMap(({ properties }) => Object.keys(properties)))];
}

function isPlain(value: unknown): value is string | number | boolean {
  return typeof value === 'string' || typeof value === 'number' || typeof value === 'boolean';
}

/** A property that has a name of ours (in any case of letters) is kept as `input_<name>`, `input_<name>_2`, as in `sites`. */
function keptNames(names: readonly string[], columns: readonly string[]): Map<string, string> {
  const ours = new Set(columns.map((name) => name.toLowerCase()));
  const taken = new Set([...names.map((name) => name.toLowerCase()), ...ours]);
  const kept = new Map<string, string>();
  for (const name of names) {
    if (!ours.has(name.toLowerCase())) continue;
    let renamed = `input_${name}`;
    for (let n = 2; taken.has(renamed.toLowerCase()); n++) renamed = `input_${name}_${n}`;
    taken.add(renamed.toLowerCase());
    kept.set(name, renamed);
  }
  return kept;
}
