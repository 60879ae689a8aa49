// Tag kernels in AssemblyScript. Each is the twin of a readable function of the same name in workers/kernels, which
// stays as reference and fallback. Arguments are byte addresses in the caller's memory (see ../wasm-module.ts).

/** sum of n doubles: lets a test see that module and memory belong together. */
export function sumDoubles(at: usize, n: i32): f64 {
  let total: f64 = 0;
  for (let i = 0; i < n; i++) total += load<f64>(at + (<usize>i << 3));
  return total;
}
