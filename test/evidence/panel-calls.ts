import type { Compute } from '../../src/base/compute.ts';
import type { Generator } from '../panel/generators.ts';
import { withNoise } from '../panel/systems.ts';
import { regimeOf } from './helpers.ts';

export const everySecond = <T>(list: readonly T[], first = 0): T[] => list.filter((_, i) => i % 2 === first);

const LENGTHS = [800, 1200, 2000];

export interface Called {
  readonly name: string;
  readonly call: string;
  readonly right: boolean;
}

/** The call on one record of each generator; lengths, where several, are taken in turn. */
export async function callEach(
  compute: Compute,
  generators: readonly Generator[],
  seed: number,
  noise = 0,
  lengths: readonly number[] = LENGTHS,
): Promise<Called[]> {
  const results: Called[] = [];
  for (const [i, generator] of generators.entries()) {
    const values = withNoise(generator.make, noise)(lengths[i % lengths.length]!, seed + i);
    const regime = await regimeOf(values, 1 + i, compute);
    const call = regime?.call ?? 'inconclusive';
    results.push({
      name: generator.name,
      call,
      right: call === 'inconclusive' || generator.right.includes(call),
    });
  }
  return results;
}

export const wrong = (results: readonly Called[]) =>
  results.filter((r) => !r.right).map((r) => `${r.name}: ${r.call}`);

/** Share of records on which a call was made. */
export const found = (results: readonly Called[]) =>
  results.filter((r) => r.call !== 'inconclusive').length / results.length;
