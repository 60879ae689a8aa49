// Raw records to times (64-bit) and channels, in blocks of 65 536 records that a consumer would take from the cache.
// decode FOLDER 8|4: formats as in tests/bench/numpy/decode.py. Eight records at a time; only groups with a marker go
// through the slow way.
#include "serve.hpp"
#ifdef __AVX2__
#include <immintrin.h>
#endif

constexpr size_t BLOCK = 65536;
static i64 times[BLOCK + 8];
static u16 channels[BLOCK + 8];

struct Digest {
  u64 count = 0, time = 0, channel = 0;
  void add(size_t n) {
    for (size_t i = (997 - count % 997) % 997; i < n; i += 997) {
      time += (u64)times[i] % 1000003;
      channel += channels[i];
    }
    count += n;
  }
};

static size_t decode8(const u64 *__restrict in, size_t n, i64 &offset) {
  constexpr u64 TIME = (1ull << 48) - 1;
  i64 *__restrict t = times;
  u16 *__restrict c = channels;
  size_t m = 0, i = 0;
  for (; i + 8 <= n; i += 8) {
    u64 any = 0;
    for (int k = 0; k < 8; k++) any |= in[i + k];
    if (__builtin_expect(!(any >> 63), 1)) {
      for (int k = 0; k < 8; k++) t[m + k] = (i64)(in[i + k] & TIME) + offset;
      for (int k = 0; k < 8; k++) c[m + k] = (u16)(in[i + k] >> 48);
      m += 8;
    } else {
      for (int k = 0; k < 8; k++) {
        if (in[i + k] >> 63) {
          offset += 1ll << 48;
          continue;
        }
        t[m] = (i64)(in[i + k] & TIME) + offset;
        c[m++] = (u16)(in[i + k] >> 48);
      }
    }
  }
  for (; i < n; i++) {
    if (in[i] >> 63) {
      offset += 1ll << 48;
      continue;
    }
    t[m] = (i64)(in[i] & TIME) + offset;
    c[m++] = (u16)(in[i] >> 48);
  }
  return m;
}

/// Bit k says whether bit 31 of word k is set.
static inline u32 topBits(const u32 *words) {
#ifdef __AVX2__
  return _mm256_movemask_ps(_mm256_castsi256_ps(_mm256_loadu_si256((const __m256i *)words)));
#else
  u32 bits = 0;
  for (int k = 0; k < 8; k++) bits |= (words[k] >> 31) << k;
  return bits;
#endif
}

/// A marker ends a group early: the tags before it are written by the same eight stores, and the next group starts behind
/// it, so that nothing depends on where in the group it stood.
static size_t decode4(const u32 *__restrict in, size_t n, i64 &offset) {
  constexpr u32 TIME = (1u << 25) - 1;
  i64 *__restrict t = times;
  u16 *__restrict c = channels;
  size_t m = 0, i = 0;
  while (i + 8 <= n) {
    const u32 marks = topBits(in + i);
    for (int k = 0; k < 8; k++) t[m + k] = (i64)(in[i + k] & TIME) + offset;
    for (int k = 0; k < 8; k++) c[m + k] = (u16)((in[i + k] >> 25) & 63);
    if (__builtin_expect(!marks, 1)) {
      m += 8;
      i += 8;
      continue;
    }
    const size_t before = __builtin_ctz(marks);
    const u32 word = in[i + before];
    if (((word >> 25) & 63) == 63) offset += (i64)(word & TIME) << 25;
    m += before;
    i += before + 1;
  }
  for (; i < n; i++) {
    const u32 word = in[i], special = word >> 31, channel = (word >> 25) & 63;
    offset += special && channel == 63 ? (i64)(word & TIME) << 25 : 0;
    t[m] = (i64)(word & TIME) + offset;
    c[m] = (u16)channel;
    m += !special;
  }
  return m;
}

int main(int, char **argument) {
  const std::string path = std::string(argument[1]) + "/records.bin";
  const bool wide = !strcmp(argument[2], "8");
  const auto words8 = wide ? load<u64>(path) : std::vector<u64>();
  const auto words4 = wide ? std::vector<u32>() : load<u32>(path);
  size_t asked = 0;
  u64 kept = 0;
  const auto each = [&](auto use) {
    i64 offset = 0;
    for (size_t i = 0; i < asked; i += BLOCK) {
      const size_t n = std::min(BLOCK, asked - i);
      use(wide ? decode8(&words8[i], n, offset) : decode4(&words4[i], n, offset));
    }
  };
  return serve(
      [&](size_t items) {
        asked = items;
        kept = 0;
        each([&](size_t n) { kept += n; });
      },
      [&] {
        Digest digest;
        each([&](size_t n) { digest.add(n); });
        return std::vector<double>{(double)kept, (double)digest.time, (double)digest.channel};
      });
}
