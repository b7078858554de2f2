import { type IssueReason, type IssueSeverity, REASON_CODES, REASONS, type StationIssue } from './reasons.js';

/** So many issues of each reason are kept; all are counted and go to the sink. */
export const KEPT_PER_REASON = 50;
const LONGEST_VALUE = 80;

/** How often a reason occurred, what it means, and its first rows. */
export interface ReasonSummary {
  readonly reasonCode: IssueReason;
  readonly meaning: string;
  readonly leftOut: number;
  readonly flagged: number;
  /** How many of them stand for a whole station; the others stand for a row. */
  readonly ofStations: number;
  readonly first: readonly StationIssue[];
}

interface Tally {
  leftOut: number;
  flagged: number;
  ofStations: number;
  first: StationIssue[];
}

/** Takes issues one by one; a promise asks the reader to wait. */
export type IssueSink = (issue: StationIssue) => void | Promise<void>;

/** Collects issues in bounded memory. */
export class IssueLog {
  readonly #tallies = new Map<IssueReason, Tally>();
  leftOut = 0;
  flagged = 0;

  /** What the sink is still busy with; whoever reads rows waits for it, so that nothing piles up. */
  pending: Promise<void> | null = null;

  constructor(private readonly sink: IssueSink | undefined) {}

  /** Adds an issue; severity is the reason's own unless given. */
  add(
    reasonCode: IssueReason,
    at: {
      line: number;
      column?: string;
      value?: string | number;
      stationId: string;
      severity?: IssueSeverity;
      /** Default a row. */
      of?: 'row' | 'station';
    },
    message: string,
  ): void {
    const severity = at.severity ?? REASONS[reasonCode][0];
    const issue: StationIssue = {
      line: at.line,
      column: at.column ?? '',
      value: String(at.value ?? '').slice(0, LONGEST_VALUE),
      reasonCode,
      severity,
      message,
      stationId: at.stationId.slice(0, LONGEST_VALUE),
    };
    const tally = this.#tally(reasonCode);
    if (severity === 'left-out') {
      tally.leftOut++;
      this.leftOut++;
    } else {
      tally.flagged++;
      this.flagged++;
    }
    if (at.of === 'station') tally.ofStations++;
    if (tally.first.length < KEPT_PER_REASON) tally.first.push(issue);
    const busy = this.sink?.(issue);
    if (busy instanceof Promise) this.pending = busy;
  }

  /** Waits until the sink can take more. */
  async settle(): Promise<void> {
    const busy = this.pending;
    this.pending = null;
    await busy;
  }

  count(reasonCode: IssueReason): number {
    const tally = this.#tallies.get(reasonCode);
    return tally === undefined ? 0 : tally.leftOut + tally.flagged;
  }

  /** In the order of the list of reasons; only those that occurred. */
  summaries(): ReasonSummary[] {
    return REASON_CODES.filter((code) => this.#tallies.has(code)).map((reasonCode) => ({
      reasonCode,
      meaning: REASONS[reasonCode][1],
      ...this.#tally(reasonCode),
    }));
  }

  #tally(reasonCode: IssueReason) {
    let tally = this.#tallies.get(reasonCode);
    if (tally === undefined) {
      tally = { leftOut: 0, flagged: 0, ofStations: 0, first: [] };
      this.#tallies.set(reasonCode, tally);
    }
    return tally;
  }
}
