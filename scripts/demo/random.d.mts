export interface Random {
  uniform(): number;
  between(low: number, high: number): number;
  integerBelow(count: number): number;
  chance(probability: number): boolean;
  normal(): number;
  gamma(shape: number): number;
  heavyTailed(): number;
  pick<T>(list: readonly T[]): T;
}

export function createRandom(seed: number, part: string): Random;
