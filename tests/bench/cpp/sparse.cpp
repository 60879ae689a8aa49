// The maps of frames.cpp by pairs of lit pixels, for frames that are mostly zero: sparse FOLDER SIDE. Pixels count what they
// hold; integers throughout. Images are listed with the padded width, so that sums and differences of two indices are the
// places in the maps.
#include "serve.hpp"

struct Lit {
  std::vector<int> place, value;
  size_t count = 0;
  /// Every lit pixel holds one photon.
  bool ones = true;
};

int main(int, char **argument) {
  const int side = atoi(argument[2]), pad = 2 * side;
  const auto frames = load<u16>(std::string(argument[1]) + "/frames.u16", 16);
  const size_t pixels = (size_t)side * side;
  /// Differences of two indices reach from -origin to origin; opposite ones are joined at the end.
  const int origin = pad * side;
  std::vector<int> plus(2 * origin), minus(2 * origin);
  Lit now, before;
  for (Lit *lit : {&now, &before}) lit->place.resize(pixels + 4), lit->value.resize(pixels + 4);

  const auto list = [&](const u16 *image, Lit &lit) {
    size_t n = 0;
    int most = 0;
    for (size_t at = 0; at < pixels; at += 4) {
      u64 four;
      memcpy(&four, image + at, 8);
      if (__builtin_expect(four == 0, 1)) continue;
      for (size_t i = at; i < at + 4; i++) {
        lit.place[n] = (int)(i / side * pad + i % side);
        lit.value[n] = image[i];
        most = std::max<int>(most, image[i]);
        n += image[i] != 0;
      }
    }
    lit.count = n;
    lit.ones = most <= 1;
  };
  /// Each pair of one image once; the other order is its mirror image (minus) or the same (plus).
  const auto own = [&](auto ones, const Lit &lit) {
    int *__restrict sum = plus.data(), *__restrict difference = minus.data() + origin;
    const int *__restrict place = lit.place.data(), *__restrict value = lit.value.data();
    for (size_t i = 0; i < lit.count; i++) {
      const int p = place[i], v = value[i];
      sum[2 * p] += v * v;
      difference[0] += v * v;
      for (size_t j = i + 1; j < lit.count; j++) {
        const int w = ones ? 2 : 2 * v * value[j];
        sum[p + place[j]] += w;
        difference[place[j] - p] += w;
      }
    }
  };
  const auto crossed = [&](auto ones, const Lit &a, const Lit &b) {
    int *__restrict sum = plus.data(), *__restrict difference = minus.data() + origin;
    for (size_t i = 0; i < a.count; i++) {
      const int p = a.place[i], v = a.value[i];
      for (size_t j = 0; j < b.count; j++) {
        const int w = ones ? 1 : v * b.value[j];
        sum[p + b.place[j]] -= w;
        difference[b.place[j] - p] -= w;
      }
    }
  };
  return serve(
      [&](size_t items) {
        std::fill(plus.begin(), plus.end(), 0);
        std::fill(minus.begin(), minus.end(), 0);
        list(&frames[0], before);
        for (size_t k = 1; k < items; k++) {
          list(&frames[k * pixels], now);
          before.ones ? own(std::true_type(), before) : own(std::false_type(), before);
          before.ones && now.ones ? crossed(std::true_type(), before, now) : crossed(std::false_type(), before, now);
          std::swap(before, now);
        }
      },
      [&] {
        std::vector<double> maps;
        for (int y = 0; y < pad - 1; y++)
          for (int x = 0; x < pad - 1; x++) maps.push_back(plus[y * pad + x]);
        for (int y = 1 - side; y < side; y++)
          for (int x = 1 - side; x < side; x++)
            maps.push_back((minus[origin + y * pad + x] + minus[origin - y * pad - x]) / 2.0);
        return maps;
      });
}
