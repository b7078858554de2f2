import type { InventedRecord, InventedSite, Pair } from './world.mjs';

export function recordTable(rows: readonly InventedRecord[]): string;
export function siteTable(sites: readonly InventedSite[]): string;
export function truthTable(sites: readonly InventedSite[], truths: readonly Pair[]): string;
