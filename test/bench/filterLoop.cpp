// The filter of the second-order likelihood and its adjoint in one dimension, written out plainly: coefficients from
// cubic splines at the predicted place, the exact transition, the scores of all functions. What `npm run bench:likelihood`
// compares with. Prints nanoseconds per position for the filter, and for both.
// Processor times. Build: g++ -O3 -march=native filterLoop.cpp -o filterLoop

#include <cmath>
#include <cstdio>
#include <ctime>
#include <random>
#include <vector>

static const int K = 36;
static const double LOW = -20, HIGH = 20;
static double force[K], logFriction[K], logNoise[K];

struct Node {
  double w[4], f, k, g, slope, n, m, v, pqq, pqv, pvv, a[9], innovation, variance, gq, gv;
  int cell;
};

static inline void readSplines(double place, Node &node) {
  const double perLength = (K - 3) / (HIGH - LOW);
  double u = (place - LOW) * perLength;
  u = u < 0 ? 0 : u > K - 3 ? K - 3 : u;
  int cell = (int)u;
  if (cell > K - 4) cell = K - 4;
  const double t = u - cell, r = 1 - t;
  node.cell = cell;
  node.w[0] = r * r * r / 6;
  node.w[1] = (3 * t * t * t - 6 * t * t + 4) / 6;
  node.w[2] = (3 * r * r * r - 6 * r * r + 4) / 6;
  node.w[3] = t * t * t / 6;
  const double d[4] = {-r * r / 2 * perLength, (1.5 * t * t - 2 * t) * perLength, (2 * r - 1.5 * r * r) * perLength,
                       t * t / 2 * perLength};
  double f = 0, g = 0, n = 0, k = 0, s = 0;
  for (int i = 0; i < 4; i++) {
    f += force[cell + i] * node.w[i];
    g += logFriction[cell + i] * node.w[i];
    n += logNoise[cell + i] * node.w[i];
    k -= force[cell + i] * d[i];
    s += logFriction[cell + i] * d[i];
  }
  node.f = f;
  node.g = std::exp(g);
  node.n = std::exp(n);
  node.k = k;
  node.slope = s * node.g;
}

static inline void transition(double x, double k, double h, double *out) {
  double size = std::max(2 * x, std::sqrt(std::fabs(k)) * 1.5);
  int terms = size < 0.09 ? 6 : size < 0.23 ? 8 : size < 0.5 ? 10 : size < 0.82 ? 12 : 14;
  double r = 0, s = 1, v = 0, c = 0, w = 0, R = 0, S = 1, C = 0, V = 0, W = 0, I = 0;
  for (int j = 0; j < terms; j++) {
    const double q = 1.0 / (j + 1);
    const double nw = 2 * c * q, nc = (v - x * c - k * w) * q, nv = ((j == 0) - 2 * x * v - 2 * k * c) * q;
    const double nr = s * q, ns = (-x * s - k * r) * q;
    I += r * q;
    r = nr, s = ns, v = nv, c = nc, w = nw;
    R += r, S += s, V += v, C += c, W += w;
  }
  out[0] = S + x * R, out[1] = h * R, out[2] = -k * R / h, out[3] = S, out[4] = h * h * I, out[5] = h * R;
  out[6] = h * h * h * W, out[7] = h * h * C, out[8] = h * V;
}

int main() {
  const int tracks = 60, frames = 1000;
  for (int i = 0; i < K; i++) {
    const double x = LOW + (i - 1) * (HIGH - LOW) / (K - 3);
    force[i] = -0.6 * x / 25;
    logFriction[i] = std::log(0.1 * (1 + std::exp(-0.5 * x * x / 6.25)));
    logNoise[i] = std::log(0.2 * (1.2 + 0.4 * std::tanh(x / 5)));
  }
  std::mt19937_64 engine(1);
  std::normal_distribution<double> normal;
  std::vector<double> y(tracks * frames);
  for (int t = 0; t < tracks; t++) {
    double q = 5 * normal(engine), v = normal(engine);
    for (int i = -200; i < frames; i++) {
      for (int sub = 0; sub < 16; sub++) {
        Node node;
        readSplines(q, node);
        const double h = 1.0 / 16;
        v += (node.f - node.g * v) * h + std::sqrt(node.n * h) * normal(engine);
        q += v * h;
      }
      if (i >= 0) y[t * frames + i] = q + 0.2 * normal(engine);
    }
  }
  std::vector<Node> tape(frames);
  std::vector<double> scores(3 * K + 1);
  const double s2 = 0.04;
  double best[2] = {1e300, 1e300}, check = 0;
  for (int repeat = 0; repeat < 30; repeat++) {
    for (int both = 0; both < 2; both++) {
      const std::clock_t begin = std::clock();
      double likelihood = 0;
      for (int t = 0; t < tracks; t++) {
        const double *track = &y[t * frames];
        double q = track[0], v = 0, pqq = s2, pqv = 0, pvv = 1e4, last = 0.1;
        for (int i = 1; i < frames; i++) {
          Node &o = tape[i];
          const double h = 1, half = h / (2 + last * h * 0.5), place = q + v * half;
          readSplines(place, o);
          last = o.g;
          o.m = q, o.v = v, o.pqq = pqq, o.pqv = pqv, o.pvv = pvv;
          if (i > 1) {
            const double x = o.g * h;
            const double cov = pqv * (1 - x / 2) + pvv * h / 2 * (1 - x) + o.n * h * h / 6 * (1 - 0.75 * x);
            o.f -= o.slope * cov;
            o.k += o.slope * v;
          }
          transition(o.g * h, o.k * h * h, h, o.a);
          const double *a = o.a, u = q - place;
          q = place + a[0] * u + a[1] * v + o.f * a[4];
          v = a[2] * u + a[3] * v + o.f * a[5];
          const double qq = a[0] * a[0] * pqq + 2 * a[0] * a[1] * pqv + a[1] * a[1] * pvv + o.n * a[6];
          const double qv = a[0] * a[2] * pqq + (a[0] * a[3] + a[1] * a[2]) * pqv + a[1] * a[3] * pvv + o.n * a[7];
          const double vv = a[2] * a[2] * pqq + 2 * a[2] * a[3] * pqv + a[3] * a[3] * pvv + o.n * a[8];
          o.innovation = track[i] - q;
          o.variance = qq + s2;
          o.gq = qq / o.variance, o.gv = qv / o.variance;
          if (i > 1) likelihood -= (std::log(o.variance) + o.innovation * o.innovation / o.variance) / 2;
          q += o.gq * o.innovation, v += o.gv * o.innovation;
          pqq = qq * s2 / o.variance, pqv = qv * s2 / o.variance, pvv = vv - o.gv * qv;
        }
        if (!both) continue;
        double gq = 0, gv = 0, bqq = 0, bqv = 0, bvv = 0;
        for (int i = frames - 1; i > 0; i--) {
          const Node &o = tape[i];
          const double scaled = o.innovation / o.variance, excess = i > 1 ? 0.5 * (scaled * scaled - 1 / o.variance) : 0;
          scores[3 * K] += s2 * (excess - (o.gq * gq + o.gv * gv) * scaled + o.gq * o.gq * bqq + 2 * o.gq * o.gv * bqv +
                                 o.gv * o.gv * bvv);
          const double left = 1 - o.gq, pulled = left * gq - o.gv * gv, lower = bqv * left - bvv * o.gv;
          bqq = left * (left * bqq - o.gv * bqv) - o.gv * lower + pulled * scaled + excess;
          bqv = lower + 0.5 * gv * scaled;
          gq = pulled + (i > 1 ? scaled : 0);
          const double *a = o.a, x = o.g, e = std::exp(-x), p1 = (1 - e) / x, p2 = (1 - p1) / x, d1 = (e - p1) / x;
          const double w = (2 * x - 3 + e * (4 - e)) / (2 * x * x * x), vv = (1 - e * e) / (2 * x);
          const double s[6] = {d1, -e, (-d1 - p2) / x, (p1 * p1 - 3 * w) / x, p1 * d1, (e * e - vv) / x};
          const double crossQ = a[0] * o.pqv + a[1] * o.pvv, crossV = a[2] * o.pqv + a[3] * o.pvv;
          const double sf = gq * a[4] + gv * a[5];
          const double sg = o.g * ((gq * o.v + 2 * (bqq * crossQ + bqv * crossV)) * s[0] +
                                   (gv * o.v + 2 * (bqv * crossQ + bvv * crossV)) * s[1] +
                                   o.f * (gq * s[2] + gv * s[0]) + o.n * (bqq * s[3] + 2 * bqv * s[4] + bvv * s[5]));
          const double sn = o.n * (bqq * a[6] + 2 * bqv * a[7] + bvv * a[8]);
          for (int j = 0; j < 4; j++) {
            scores[o.cell + j] += sf * o.w[j];
            scores[K + o.cell + j] += sg * o.w[j];
            scores[2 * K + o.cell + j] += sn * o.w[j];
          }
          const double ngq = a[0] * gq + a[2] * gv, ngv = a[1] * gq + a[3] * gv;
          const double lqq = bqq * a[0] + bqv * a[2], lqv = bqq * a[1] + bqv * a[3];
          const double lvq = bqv * a[0] + bvv * a[2], lvv = bqv * a[1] + bvv * a[3];
          gq = ngq, gv = ngv;
          bqq = a[0] * lqq + a[2] * lvq, bqv = a[0] * lqv + a[2] * lvv, bvv = a[1] * lqv + a[3] * lvv;
        }
      }
      const double spent = 1e9 * double(std::clock() - begin) / CLOCKS_PER_SEC;
      best[both] = std::min(best[both], spent / (tracks * frames));
      check += likelihood + scores[5];
    }
  }
  std::printf("%.2f %.2f %g\n", best[0], best[1], check);
}
