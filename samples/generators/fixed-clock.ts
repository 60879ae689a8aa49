/**
 * HDF5 keeps the time of writing in every object, which would give the same data another fingerprint each day. While
 * `work` runs, the clock stands at the start of 2020.
 */
export async function withFixedClock<T>(work: () => Promise<T>): Promise<T> {
  const { now } = Date;
  Date.now = () => Date.UTC(2020, 0, 1);
  try {
    return await work();
  } finally {
    Date.now = now;
  }
}
