// Coincidence counting on sorted 64-bit times: scan FOLDER histogram|merged|lists|heralded. What is counted: see the
// script of that name in tests/bench/numpy. Lower pointers advance by the sum of four comparisons, and what most events
// do not have (a partner) is asked with one branch that is mostly right.
#include "serve.hpp"
#include <limits>

constexpr i64 NEVER = std::numeric_limits<i64>::max();

/// First index from `low` on whose time is at least `from`; the list ends in four times that never come.
static inline size_t advance(const i64 *__restrict t, size_t low, i64 from) {
  for (;;) {
    const size_t step = (t[low] < from) + (t[low + 1] < from) + (t[low + 2] < from) + (t[low + 3] < from);
    low += step;
    if (__builtin_expect(step < 4, 1)) return low;
  }
}

static void histogram(const i64 *__restrict a, const i64 *__restrict b, size_t n, u32 *__restrict counts) {
  constexpr i64 REACH = 100000;
  constexpr double PER_TICK = 10000 / (2.0 * REACH);
  size_t low = 0;
  for (size_t i = 0; i < n; i++) {
    const i64 from = a[i] - REACH;
    low = advance(b, low, from);
    for (size_t j = low; b[j] < from + 2 * REACH; j++) counts[(u32)((double)(b[j] - from) * PER_TICK)]++;
  }
}

static void merged(const i64 *__restrict t, const u16 *__restrict site, size_t n, u32 *__restrict counts) {
  constexpr i64 REACH = 2000;
  for (size_t i = 0; i < n; i++) {
    const i64 last = t[i] + REACH;
    for (size_t j = i + 1; t[j] <= last; j++) {
      const u32 p = site[i], q = site[j];
      if (((p ^ q) & 64) != 0) counts[std::min(p, q) * 64 + std::max(p, q) - 64]++;
    }
  }
}

static void lists(const i64 *__restrict a, const u16 *__restrict p, const i64 *__restrict b, const u16 *__restrict q,
                  size_t n, u32 *__restrict counts) {
  constexpr i64 REACH = 2000;
  size_t low = 0;
  for (size_t i = 0; i < n; i++) {
    low = advance(b, low, a[i] - REACH);
    for (size_t j = low; b[j] <= a[i] + REACH; j++) counts[p[i] * 64 + q[j]]++;
  }
}

static void heralded(const i64 *__restrict bucket, const i64 *__restrict array, const u16 *__restrict pixel, size_t n,
                     u32 *__restrict counts) {
  constexpr i64 HALF = 1500, DELAY = 25000, SHIFTED = 225000;
  size_t low = 0, lowShifted = 0;
  for (size_t i = 0; i < n; i++) {
    const i64 t = array[i];
    low = advance(bucket, low, t - DELAY - HALF);
    lowShifted = advance(bucket, lowShifted, t - SHIFTED - HALF);
    for (size_t j = low; bucket[j] <= t - DELAY + HALF; j++) counts[pixel[i]]++;
    for (size_t j = lowShifted; bucket[j] <= t - SHIFTED + HALF; j++) counts[1024 + pixel[i]]++;
  }
}

int main(int, char **argument) {
  const std::string folder = std::string(argument[1]) + "/", what = argument[2];
  const auto times = [&](const char *name) { return load<i64>(folder + name + ".i64", 8, NEVER); };
  const auto sites = [&](const char *name) { return load<u16>(folder + name + ".u16", 8); };
  std::vector<u32> counts;
  const auto answer = [&] { return std::vector<double>(counts.begin(), counts.end()); };
  /// Only the first `n` of a list, with an end behind them; what was there comes back after the pass.
  const auto cut = [](std::vector<i64> &list, size_t n, auto use) {
    i64 kept[8];
    std::copy_n(&list[n], 8, kept);
    std::fill_n(&list[n], 8, NEVER);
    use();
    std::copy_n(kept, 8, &list[n]);
  };
  if (what == "histogram") {
    auto a = times("a"), b = times("b");
    return serve(
        [&](size_t items) {
          counts.assign(10000, 0);
          cut(b, items / 2, [&] { histogram(a.data(), b.data(), items / 2, counts.data()); });
        },
        answer);
  }
  if (what == "merged") {
    auto t = times("merged");
    const auto site = sites("merged");
    return serve(
        [&](size_t items) {
          counts.assign(4096, 0);
          cut(t, items, [&] { merged(t.data(), site.data(), items, counts.data()); });
        },
        answer);
  }
  if (what == "lists") {
    auto s = times("s"), i = times("i");
    const auto p = sites("s"), q = sites("i");
    return serve(
        [&](size_t items) {
          counts.assign(4096, 0);
          cut(i, items / 2, [&] { lists(s.data(), p.data(), i.data(), q.data(), items / 2, counts.data()); });
        },
        answer);
  }
  auto bucket = times("bucket"), array = times("array");
  const auto pixel = sites("array");
  return serve(
      [&](size_t items) {
        counts.assign(2048, 0);
        cut(bucket, items / 2, [&] { heralded(bucket.data(), array.data(), pixel.data(), items / 2, counts.data()); });
      },
      answer);
}
