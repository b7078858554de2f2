import { describe, expect, it } from 'vitest';
import { openTable, type TableOptions, type TableRow, type Vocabulary } from '../../../src/stations/index.js';

type Meaning = 'id' | 'lon' | 'lat' | 'elevation' | 'value';
const vocabulary: Vocabulary<Meaning> = {
  id: { kind: 'text', tiers: [['id', 'plot'], ['name']] },
  lon: { kind: 'number', tiers: [['lon', 'longitude']] },
  lat: { kind: 'number', tiers: [['lat', 'latitude']] },
  elevation: { kind: 'number', tiers: [['elevation', 'elevationm']] },
  value: { kind: 'number', tiers: [['d18o']] },
};
const placeMeanings = { lon: 'lon', lat: 'lat', elevation: 'elevation' } as const;

async function* chunks(data: string | Uint8Array, size = Number.POSITIVE_INFINITY) {
  const bytes = typeof data === 'string' ? new TextEncoder().encode(data) : data;
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, Math.min(bytes.length, at + size));
}

async function read(data: string | Uint8Array, options: Partial<TableOptions<Meaning>> = {}, size?: number) {
  const table = await openTable(chunks(data, size), { vocabulary, placeMeanings, ...options });
  const rows: TableRow[] = [];
  for await (const row of table.rows) rows.push(row);
  return { table, rows, columns: Object.fromEntries(table.columns) };
}

const latin1 = (text: string) => Uint8Array.from(text, (c) => c.charCodeAt(0));
const utf16le = (text: string) =>
  Uint8Array.from([0xff, 0xfe, ...new Uint8Array(Buffer.from(text, 'utf16le'))]);

describe('openTable: delimiter and decimal mark', () => {
  it.each([
    ['comma', 'id,lon,lat\nA,1.5,2.5\n', ',', '.'],
    ['semicolon with decimal comma', 'id;lon;lat\nA;1,5;2,5\n', ';', ','],
    ['semicolon with commas in the header', 'id;lon;lat;note, long, of the plot\nA;1.5;2.5;x\n', ';', '.'],
    ['tab', 'id\tlon\tlat\nA\t1,5\t2,5\n', '\t', ','],
    ['comma with quoted decimal commas', 'id,lon,lat\nA,"1,5","2,5"\n', ',', ','],
    ['a spreadsheet hint line', 'sep=;\nid;lon;lat\nA;1,5;2,5\n', ';', ','],
    ['thousands alone are no evidence', 'id;lon;lat\nA;1,500;2\n', ';', '.'],
  ])('%s', async (_name, text, delimiter, decimal) => {
    const { table, rows } = await read(text);
    expect([table.delimiter, table.decimal, rows.length]).toEqual([delimiter, decimal, 1]);
    expect(rows[0].cells[0]).toBe('A');
  });
});

describe('openTable: encodings', () => {
  const text = 'id;lon;lat\nÅsgård–é;1.5;2.5\n';
  it.each([
    ['utf-8', new TextEncoder().encode(text), 'utf-8'],
    ['utf-8 with mark', new TextEncoder().encode(`\ufeff${text}`), 'utf-8'],
    ['utf-16 with mark', utf16le(text), 'utf-16le'],
    ['windows-1252', latin1(text.replace('–', '\x96')), 'windows-1252'],
  ])('%s, in chunks of any size', async (_name, bytes, encoding) => {
    for (const size of [1, 2, 3, 5, 7, 1000]) {
      const { table, rows } = await read(bytes, {}, size);
      expect(table.header[0]).toBe('id');
      expect(table.encoding()).toBe(encoding);
      if (encoding !== 'windows-1252') expect(rows[0].cells[0]).toBe('Åsgård–é');
      else expect(rows[0].cells[0]).toMatch(/^Åsgård.é$/);
    }
  });

  it('decides late where the first letter beyond ASCII comes late', async () => {
    const bytes = latin1(`id,lon,lat\n${'A,1,2\n'.repeat(40_000)}Sk\xe5ne,1,2\n`);
    const { table, rows } = await read(bytes);
    expect(table.encoding()).toBe('windows-1252');
    expect(rows.at(-1)).toEqual({ line: 40_002, cells: ['Skåne', '1', '2'], problem: null });
  });
});

describe('openTable: rows', () => {
  it('numbers lines through blank lines, mixed line ends and quoted line breaks', async () => {
    const { rows } = await read('id,lon,lat\r\n\r\nA,1,2\n"B\nb",1,2\rC,1,2\r\nD,1\n');
    expect(rows.map((row) => row.line)).toEqual([3, 4, 6, 7]);
    expect(rows[3].problem).toMatchObject({ kind: 'row-ragged', value: '2 cells' });
  });

  it('takes empty extra cells for what a spreadsheet leaves behind', async () => {
    const { rows } = await read('id,lon,lat\nA,1,2,,\nB,1,2,3\n');
    expect(rows.map((row) => row.problem?.kind ?? null)).toEqual([null, 'row-ragged']);
  });

  it('ends the source when the reader stops early', async () => {
    let closed = false;
    async function* endless() {
      try {
        yield new TextEncoder().encode('id,lon,lat\n');
        for (;;) yield new TextEncoder().encode('A,1,2\n'.repeat(1000));
      } finally {
        closed = true;
      }
    }
    const table = await openTable(endless(), { vocabulary });
    for await (const row of table.rows) if (row.line > 10) break;
    await new Promise((resolve) => setTimeout(resolve, 10));
    expect(closed).toBe(true);
  });
});

describe('openTable: GeoJSON', () => {
  const collection = (features: unknown[]) => JSON.stringify({ type: 'FeatureCollection', features });
  const point = (coordinates: unknown, properties: unknown = { plot: 'A', d18O: -8 }) => ({
    type: 'Feature',
    geometry: { type: 'Point', coordinates },
    properties,
  });

  it('takes longitude and latitude from the geometry, elevation where no property has it', async () => {
    const { table, rows, columns } = await read(collection([point([1, 2, 300]), point([3, 4])]));
    expect(columns).toEqual({ id: 0, value: 1, lon: 2, lat: 3, elevation: 4 });
    expect(rows.map((row) => row.cells.slice(0, 5))).toEqual([
      ['A', '-8', '1', '2', '300'],
      ['A', '-8', '3', '4', ''],
    ]);
    expect([table.format, table.decimal, table.delimiter]).toEqual(['geojson', '.', null]);
  });

  it('does not take a property called lat for the latitude', async () => {
    const { columns } = await read(collection([point([1, 2], { lat: 50, plot: 'A' })]));
    expect(columns).toEqual({ id: 1, lon: 2, lat: 3 });
  });

  it('names features that are no points', async () => {
    const line = { type: 'Feature', geometry: { type: 'LineString', coordinates: [] }, properties: {} };
    const { rows } = await read(collection([point([1, 2]), line, { type: 'Feature', geometry: null }, 7]));
    expect(rows.map((row) => row.problem?.value ?? null)).toEqual([
      null,
      'geometry LineString',
      'no geometry',
      'no GeoJSON Feature',
    ]);
  });

  it('reads a long collection on one line', async () => {
    const { rows } = await read(collection(Array.from({ length: 20_000 }, (_, i) => point([i / 1000, 1]))));
    expect(rows.length).toBe(20_000);
  });
});
