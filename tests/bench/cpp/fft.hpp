// Fourier transforms of many sequences side by side: lane l of every vector belongs to sequence l, so that no butterfly
// shuffles. Radix 4, decimation in frequency, in place, output in digit-reversed order (`frequency[place]`); for lengths
// 4^a and 8 * 4^a.
#pragma once
#include <cmath>
#include <cstddef>
#include <vector>

#define INLINE inline __attribute__((always_inline))

template <class T> struct Lanes {
  static constexpr int COUNT = 32 / sizeof(T);
  typedef T V __attribute__((vector_size(32)));
};

template <class T> struct Fft {
  using V = typename Lanes<T>::V;
  int n;
  std::vector<int> frequency;
  /// Three twiddle factors of every butterfly, stage after stage.
  std::vector<T> twiddles;

  explicit Fft(int length) : n(length), frequency(length) {
    for (int size = n; size > 8; size /= 4)
      for (int j = 0; j < size / 4; j++)
        for (int r = 1; r < 4; r++) {
          const double angle = -2 * M_PI * j * r / size;
          twiddles.push_back((T)cos(angle));
          twiddles.push_back((T)sin(angle));
        }
    order(0, n, 0, 1);
  }

  /// Of `re` and `im`; only the first half is read when `HALF`, the rest being zero. `sink(place, re, im)` gets the output.
  template <bool HALF, class Sink> INLINE void run(V *re, V *im, Sink sink) const {
    const T *w = twiddles.data();
    int size = n;
    if (HALF) {
      half(re, im, w);
      w += 6 * (size / 4);
      size /= 4;
    }
    for (; size > 8; size /= 4) {
      for (int base = 0; base < n; base += size) stage(re + base, im + base, size / 4, w);
      w += 6 * (size / 4);
    }
    if (size == 8)
      for (int base = 0; base < n; base += 8) eight(re + base, im + base, base, sink);
    else
      for (int base = 0; base < n; base += 4) four(re + base, im + base, base, sink);
  }

private:
  /// Outputs k = first + step * m of the transform that stands at [place, place + size).
  void order(int place, int size, int first, int step) {
    if (size == 8) {
      for (int m = 0; m < 8; m++) frequency[place + m] = first + step * m;
    } else if (size == 4) {
      for (int m = 0; m < 4; m++) frequency[place + m] = first + step * m;
    } else {
      for (int r = 0; r < 4; r++) order(place + r * size / 4, size / 4, first + r * step, 4 * step);
    }
  }

  static INLINE void turn(V &re, V &im, T c, T s) {
    const V r = re * c - im * s;
    im = re * s + im * c;
    re = r;
  }

  static INLINE void butterfly(V ar, V ai, V br, V bi, V cr, V ci, V dr, V di, V *xr, V *xi) {
    const V t0r = ar + cr, t0i = ai + ci, t1r = ar - cr, t1i = ai - ci;
    const V t2r = br + dr, t2i = bi + di, t3r = bi - di, t3i = dr - br;
    xr[0] = t0r + t2r, xi[0] = t0i + t2i;
    xr[1] = t1r + t3r, xi[1] = t1i + t3i;
    xr[2] = t0r - t2r, xi[2] = t0i - t2i;
    xr[3] = t1r - t3r, xi[3] = t1i - t3i;
  }

  static INLINE void turned(V *re, V *im, int q, int j, V *xr, V *xi, const T *w) {
    for (int r = 1; r < 4; r++) turn(xr[r], xi[r], w[6 * j + 2 * r - 2], w[6 * j + 2 * r - 1]);
    for (int r = 0; r < 4; r++) re[j + r * q] = xr[r], im[j + r * q] = xi[r];
  }

  static INLINE void stage(V *re, V *im, int q, const T *w) {
    for (int j = 0; j < q; j++) {
      V xr[4], xi[4];
      butterfly(re[j], im[j], re[j + q], im[j + q], re[j + 2 * q], im[j + 2 * q], re[j + 3 * q], im[j + 3 * q], xr, xi);
      turned(re, im, q, j, xr, xi, w);
    }
  }

  /// The first stage where the second half is zero.
  INLINE void half(V *re, V *im, const T *w) const {
    const int q = n / 4;
    for (int j = 0; j < q; j++) {
      const V ar = re[j], ai = im[j], br = re[j + q], bi = im[j + q];
      V xr[4] = {ar + br, ar + bi, ar - br, ar - bi}, xi[4] = {ai + bi, ai - br, ai - bi, ai + br};
      turned(re, im, q, j, xr, xi, w);
    }
  }

  template <class Sink> static INLINE void four(const V *re, const V *im, int place, Sink sink) {
    V xr[4], xi[4];
    butterfly(re[0], im[0], re[1], im[1], re[2], im[2], re[3], im[3], xr, xi);
    for (int r = 0; r < 4; r++) sink(place + r, xr[r], xi[r]);
  }

  template <class Sink> static INLINE void eight(const V *re, const V *im, int place, Sink sink) {
    V er[4], ei[4], odd[4], odi[4];
    butterfly(re[0], im[0], re[2], im[2], re[4], im[4], re[6], im[6], er, ei);
    butterfly(re[1], im[1], re[3], im[3], re[5], im[5], re[7], im[7], odd, odi);
    const T root = (T)M_SQRT1_2;
    const V r1 = (odd[1] + odi[1]) * root, i1 = (odi[1] - odd[1]) * root;
    const V r3 = (odi[3] - odd[3]) * root, i3 = (-odd[3] - odi[3]) * root;
    const V tr[4] = {odd[0], r1, odi[2], r3}, ti[4] = {odi[0], i1, -odd[2], i3};
    for (int k = 0; k < 4; k++) {
      sink(place + k, er[k] + tr[k], ei[k] + ti[k]);
      sink(place + k + 4, er[k] - tr[k], ei[k] - ti[k]);
    }
  }
};
