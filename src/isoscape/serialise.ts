import { RainprintError } from '../errors.js';
import { canonicalJson, contentHash } from './canonical-json.js';
import { findInconsistency } from './file-consistency.js';
import { fileSchema } from './file-schema.js';
import { FIRST_SCHEMA_VERSION, ISOSCAPE_SCHEMA_VERSION, type Isoscape } from './isoscape.js';
import { storedStations } from './station-columns.js';

/**
 * Text of an isoscape file: canonical JSON (one value a line at the top level) with a checksum over all of it, so
 * that the same isoscape is the same bytes and a damaged file is told from a whole one.
 */
export function writeIsoscape(isoscape: Isoscape): string {
  const { covariates, likelihood, ...rest } = isoscape;
  const body = {
    format: 'rainprint-isoscape',
    ...rest,
    stations: storedStations(isoscape.stations),
    ...(covariates.length === 0 ? {} : { covariates }),
    ...(likelihood.method === 'exact' ? {} : { likelihood }),
  };
  const members = Object.entries({ ...body, checksum: contentHash(body) })
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .map(([key, value]) => `${JSON.stringify(key)}:${canonicalJson(value)}`);
  return `{\n${members.join(',\n')}\n}\n`;
}

/**
 * Reads an isoscape file.
 * @throws ISOSCAPE_NOT_JSON (no JSON, or none of ours), ISOSCAPE_OLDER, ISOSCAPE_NEWER (schema version),
 *         ISOSCAPE_DAMAGED (a member missing or of the wrong kind, members that do not fit each other, or a
 *         checksum that does not fit)
 */
export function readIsoscape(text: string): Isoscape {
  const content = parseJson(text);
  if (
    typeof content !== 'object' ||
    content === null ||
    !('format' in content) ||
    content.format !== 'rainprint-isoscape'
  ) {
    throw new RainprintError(
      'ISOSCAPE_NOT_JSON',
      'this JSON is not an isoscape: its member "format" is not "rainprint-isoscape"',
      {},
    );
  }
  const { checksum, ...body } = content as Record<string, unknown>;
  checkVersion(body.schemaVersion);
  const parsed = fileSchema.safeParse(body);
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    const where = issue.path.join('.') || '(top)';
    throw new RainprintError('ISOSCAPE_DAMAGED', `isoscape member "${where}": ${issue.message}`, {
      member: where,
    });
  }
  const expected = contentHash(body);
  if (checksum !== expected) {
    throw new RainprintError(
      'ISOSCAPE_DAMAGED',
      `the isoscape's content does not fit its checksum (file says ${String(checksum).slice(0, 16)}…, content gives ` +
        `${expected.slice(0, 16)}…): it was changed or cut after it was written; fit it again`,
      {},
    );
  }
  const { format: _format, ...rest } = parsed.data;
  const isoscape = rest as unknown as Isoscape;
  const found = findInconsistency(isoscape);
  if (found !== null) {
    throw new RainprintError('ISOSCAPE_DAMAGED', `isoscape member "${found.member}": ${found.reason}`, {
      member: found.member,
    });
  }
  return isoscape;
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    const reason = error instanceof Error ? error.message.slice(0, 200) : 'unreadable';
    throw new RainprintError(
      'ISOSCAPE_NOT_JSON',
      `the isoscape file is not JSON, or was cut off (${text.length} characters): ${reason}`,
      { characters: text.length },
    );
  }
}

function checkVersion(version: unknown): void {
  if (typeof version !== 'number' || !Number.isInteger(version)) {
    throw new RainprintError('ISOSCAPE_DAMAGED', 'isoscape member "schemaVersion" is not a whole number', {
      member: 'schemaVersion',
    });
  }
  const newer = version > ISOSCAPE_SCHEMA_VERSION;
  if (!newer && version >= FIRST_SCHEMA_VERSION) return;
  throw new RainprintError(
    newer ? 'ISOSCAPE_NEWER' : 'ISOSCAPE_OLDER',
    `the isoscape file has schema version ${version}; this program reads versions ${FIRST_SCHEMA_VERSION} to ` +
      `${ISOSCAPE_SCHEMA_VERSION}: ` +
      (newer ? 'use a newer program' : 'fit it again from the station table'),
    { version, supported: ISOSCAPE_SCHEMA_VERSION },
  );
}
