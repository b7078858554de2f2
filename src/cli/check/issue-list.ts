import { type StationIssue, safeRow } from '../../stations/index.js';
import { type OutputFile, openOutput } from '../output-file.js';

const FLUSH_CHARACTERS = 1 << 16;
const HEADER = ['line', 'station', 'severity', 'reason', 'column', 'value', 'message'];

/** A CSV with every row left out or flagged, written as the rows stream by. */
export class IssueList {
  #text = safeRow(HEADER);
  #writing: Promise<void> = Promise.resolve();

  private constructor(private readonly file: OutputFile) {}

  static async open(path: string, inputs: readonly string[]): Promise<IssueList> {
    return new IssueList(await openOutput(path, inputs));
  }

  /** A promise where the text waiting to be written has grown: the reader then waits. */
  add(issue: StationIssue): void | Promise<void> {
    const { line, stationId, severity, reasonCode, column, value, message } = issue;
    this.#text += safeRow([line, stationId, severity, reasonCode, column, value, message]);
    if (this.#text.length >= FLUSH_CHARACTERS) return this.#flush();
  }

  async commit(): Promise<void> {
    await this.#flush();
    await this.file.commit();
  }

  abort(): Promise<void> {
    return this.file.abort();
  }

  #flush(): Promise<void> {
    const text = this.#text;
    this.#text = '';
    this.#writing = this.#writing.then(() => this.file.write(text));
    return this.#writing;
  }
}
