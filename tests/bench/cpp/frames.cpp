// Sum- and difference-coordinate maps of consecutive-frame covariance: frames FOLDER SIDE (128 or 256). What is summed: see
// tests/bench/numpy/frames.py. Transforms of our own (fft.hpp) in single precision, two difference frames in one complex
// row transform, eight rows at once, then eight columns at once with the products added where the last butterflies end;
// totals in double precision.
#include "fft.hpp"
#include "serve.hpp"

using F = Lanes<float>::V;
typedef u16 H __attribute__((vector_size(16)));
typedef int I __attribute__((vector_size(32)));

static INLINE void transpose(F *x) {
  F a[8], b[8];
  for (int i = 0; i < 8; i += 2) {
    a[i] = __builtin_shufflevector(x[i], x[i + 1], 0, 8, 1, 9, 4, 12, 5, 13);
    a[i + 1] = __builtin_shufflevector(x[i], x[i + 1], 2, 10, 3, 11, 6, 14, 7, 15);
  }
  for (int i = 0; i < 8; i += 4) {
    b[i] = __builtin_shufflevector(a[i], a[i + 2], 0, 1, 8, 9, 4, 5, 12, 13);
    b[i + 1] = __builtin_shufflevector(a[i], a[i + 2], 2, 3, 10, 11, 6, 7, 14, 15);
    b[i + 2] = __builtin_shufflevector(a[i + 1], a[i + 3], 0, 1, 8, 9, 4, 5, 12, 13);
    b[i + 3] = __builtin_shufflevector(a[i + 1], a[i + 3], 2, 3, 10, 11, 6, 7, 14, 15);
  }
  for (int i = 0; i < 4; i++) {
    x[i] = __builtin_shufflevector(b[i], b[i + 4], 0, 1, 2, 3, 8, 9, 10, 11);
    x[i + 4] = __builtin_shufflevector(b[i], b[i + 4], 4, 5, 6, 7, 12, 13, 14, 15);
  }
}

static INLINE I widen(const u16 *at) {
  H narrow;
  memcpy(&narrow, at, 16);
  return __builtin_convertvector(narrow, I);
}

template <int SIDE> struct Maps {
  static constexpr int PAD = 2 * SIDE, STRIPS = SIDE / 8 + 1, BATCH = 16, FLUSH = 64;
  static constexpr size_t FRAME = (size_t)SIDE * SIDE;
  Fft<float> fft{PAD};
  std::vector<int> place = std::vector<int>(PAD);
  /// Row spectra of the frames of a batch: [frame][strip][row][re, im].
  std::vector<F> rows = std::vector<F>((size_t)(BATCH + 1) * STRIPS * SIDE * 2);
  /// Sums since the last flush: [strip][place][re of F F, half its im, |F|^2].
  std::vector<F> sums = std::vector<F>((size_t)STRIPS * PAD * 3);
  /// [kx][ky], kx from 0 to SIDE.
  std::vector<double> plusRe, plusIm, minusRe;

  Maps() {
    for (int p = 0; p < PAD; p++) place[fft.frequency[p]] = p;
  }

  F *rowsOf(int frame, int strip) { return &rows[((size_t)frame * STRIPS + strip) * SIDE * 2]; }

  /// Row spectra of p - q and q - r (of p and q where `ends`) into slots `slot` and `slot` + 1.
  template <bool ENDS> void rowPass(const u16 *p, const u16 *q, const u16 *r, int slot) {
    F re[PAD], im[PAD], outRe[PAD + 8], outIm[PAD + 8];
    for (int top = 0; top < SIDE; top += 8) {
      for (int x = 0; x < SIDE; x += 8) {
        for (int y = 0; y < 8; y++) {
          const size_t at = (size_t)(top + y) * SIDE + x;
          const I a = widen(p + at), b = widen(q + at);
          re[x + y] = __builtin_convertvector(ENDS ? a : a - b, F);
          im[x + y] = __builtin_convertvector(ENDS ? b : b - widen(r + at), F);
        }
        transpose(re + x);
        transpose(im + x);
      }
      fft.template run<true>(re, im, [&](int at, F zRe, F zIm) { outRe[at] = zRe, outIm[at] = zIm; });
      // Two real rows from one complex: F1 = (Z + conj Zm) / 2, F2 = (Z - conj Zm) / 2i; the halves are left to the end.
      for (int strip = 0; strip < STRIPS; strip++) {
        F r1[8], i1[8], r2[8], i2[8];
        for (int l = 0; l < 8; l++) {
          const int k = std::min(8 * strip + l, SIDE);
          const int a = place[k], b = place[(PAD - k) % PAD];
          r1[l] = outRe[a] + outRe[b], i1[l] = outIm[a] - outIm[b];
          r2[l] = outIm[a] + outIm[b], i2[l] = outRe[b] - outRe[a];
        }
        transpose(r1), transpose(i1), transpose(r2), transpose(i2);
        F *first = rowsOf(slot, strip) + 2 * top, *second = rowsOf(slot + 1, strip) + 2 * top;
        for (int l = 0; l < 8; l++) {
          first[2 * l] = r1[l], first[2 * l + 1] = i1[l];
          second[2 * l] = r2[l], second[2 * l + 1] = i2[l];
        }
      }
    }
  }

  void columnPass(int from, int to) {
    F re[PAD], im[PAD];
    for (int strip = 0; strip < STRIPS; strip++) {
      F *sum = &sums[(size_t)strip * PAD * 3];
      for (int frame = from; frame < to; frame++) {
        const F *in = rowsOf(frame, strip);
        for (int y = 0; y < SIDE; y++) re[y] = in[2 * y], im[y] = in[2 * y + 1];
        fft.template run<true>(re, im, [&](int at, F fRe, F fIm) {
          F *to = sum + 3 * at;
          to[0] += fRe * fRe - fIm * fIm;
          to[1] += fRe * fIm;
          to[2] += fRe * fRe + fIm * fIm;
        });
      }
    }
  }

  /// Single precision holds the sums of a few frames; the rest is double. The factor undoes the doubled spectra.
  void flush(double scale) {
    for (int kx = 0; kx <= SIDE; kx++)
      for (int at = 0; at < PAD; at++) {
        const F *from = &sums[((size_t)(kx / 8) * PAD + at) * 3];
        const size_t to = (size_t)kx * PAD + fft.frequency[at];
        plusRe[to] += 0.25 * scale * from[0][kx % 8];
        plusIm[to] += 0.5 * scale * from[1][kx % 8];
        minusRe[to] += 0.25 * scale * from[2][kx % 8];
      }
    std::fill(sums.begin(), sums.end(), F{});
  }

  void work(const u16 *frames, size_t items) {
    for (auto *spectrum : {&plusRe, &plusIm, &minusRe}) spectrum->assign((size_t)(SIDE + 1) * PAD, 0);
    std::fill(sums.begin(), sums.end(), F{});
    const size_t differences = items - 1;
    int held = 0, summed = 0;
    for (size_t k = 0; k < differences; k += 2) {
      const u16 *p = frames + k * FRAME, *q = p + FRAME;
      // An odd last one shares its transform with a difference of zero.
      rowPass<false>(p, q, k + 1 < differences ? q + FRAME : q, held);
      held += 2;
      if (held < BATCH && k + 2 < differences) continue;
      columnPass(0, held);
      summed += held;
      held = 0;
      if (summed >= FLUSH) flush(0.5), summed = 0;
    }
    flush(0.5);
    rowPass<true>(frames, frames + (items - 1) * FRAME, frames, 0);
    columnPass(0, 1);
    flush(0.5);
    columnPass(1, 2);
    flush(-0.5);
    invert();
  }

  std::vector<double> fieldRe, fieldIm;

  /// plus + i minus as one field and one inverse transform: along ky, then along kx, four sequences at once.
  void invert() {
    using D = Lanes<double>::V;
    static const Fft<double> back(PAD);
    fieldRe.assign((size_t)PAD * PAD, 0), fieldIm.assign((size_t)PAD * PAD, 0);
    const double scale = 1.0 / ((double)PAD * PAD);
    D re[PAD], im[PAD];
    for (int kx = 0; kx < PAD; kx += 4) {
      for (int l = 0; l < 4; l++) {
        const bool mirrored = kx + l > SIDE;
        const size_t from = (size_t)(mirrored ? PAD - kx - l : kx + l) * PAD;
        for (int ky = 0; ky < PAD; ky++) {
          const size_t at = from + (mirrored ? (PAD - ky) % PAD : ky);
          // Real and imaginary parts exchanged, here and at the end, make the forward transform the inverse one.
          im[ky][l] = scale * plusRe[at];
          re[ky][l] = scale * ((mirrored ? -plusIm[at] : plusIm[at]) + minusRe[at]);
        }
      }
      back.run<false>(re, im, [&](int at, D zRe, D zIm) {
        memcpy(&fieldRe[(size_t)back.frequency[at] * PAD + kx], &zRe, 32);
        memcpy(&fieldIm[(size_t)back.frequency[at] * PAD + kx], &zIm, 32);
      });
    }
    for (int y = 0; y < PAD; y += 4) {
      for (int l = 0; l < 4; l++)
        for (int kx = 0; kx < PAD; kx++) {
          re[kx][l] = fieldRe[(size_t)(y + l) * PAD + kx];
          im[kx][l] = fieldIm[(size_t)(y + l) * PAD + kx];
        }
      back.run<false>(re, im, [&](int at, D zRe, D zIm) {
        for (int l = 0; l < 4; l++) {
          fieldRe[(size_t)(y + l) * PAD + back.frequency[at]] = zRe[l];
          fieldIm[(size_t)(y + l) * PAD + back.frequency[at]] = zIm[l];
        }
      });
    }
  }

  std::vector<double> answer() const {
    std::vector<double> maps;
    for (int y = 0; y < PAD - 1; y++)
      for (int x = 0; x < PAD - 1; x++) maps.push_back(fieldIm[(size_t)y * PAD + x]);
    for (int y = 1 - SIDE; y < SIDE; y++)
      for (int x = 1 - SIDE; x < SIDE; x++) maps.push_back(fieldRe[(size_t)((y + PAD) % PAD) * PAD + (x + PAD) % PAD]);
    return maps;
  }
};

template <int SIDE> int serveMaps(const std::vector<u16> &frames) {
  Maps<SIDE> maps;
  return serve([&](size_t items) { maps.work(frames.data(), items); }, [&] { return maps.answer(); });
}

int main(int, char **argument) {
  const auto frames = load<u16>(std::string(argument[1]) + "/frames.u16");
  return atoi(argument[2]) == 256 ? serveMaps<256>(frames) : serveMaps<128>(frames);
}
