import { Problem } from '../../../shared/errors/problem';

/**
 * The floats themselves when each is a whole number that its type keeps exactly. A table of times and channels is often
 * saved as floats; past 2^53 (2^24 of 32 bits) the last ticks were already lost, and a fraction means another unit.
 */
export function assertWhole(
  values: Float32Array | Float64Array,
  role: string,
  firstRecord: number,
  place: string,
): void {
  const limit = values instanceof Float32Array ? 2 ** 24 : 2 ** 53;
  for (let i = 0; i < values.length; i += 1) {
    const value = values[i]!;
    if (Math.floor(value) === value && value < limit && value > -limit) continue;
    throw new Problem(
      'wrong-type',
      `Expected whole numbers below 2^${Math.log2(limit)} for the ${role}, found ${value} at record ${firstRecord + i}; save whole ticks and channels as integers, for example by numpy.rint(times / tick).astype("int64").`,
      `${place}, record ${firstRecord + i}`,
    );
  }
}
