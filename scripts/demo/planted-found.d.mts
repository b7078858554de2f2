import type { PlantedErrors } from './world.mjs';

export interface FoundIssue {
  readonly reasonCode: string;
  readonly stationId: string;
  readonly line: number;
  readonly message: string;
}

export function plantedFound(
  planted: PlantedErrors,
  issues: readonly FoundIssue[],
): { mistake: string; found: string | null }[];
