// The same loop as src/simulation's integrator over 2-D spline fields, in C++: one polynomial per cell, symmetric
// splitting with an exact friction-noise step, xoroshiro128+ with ziggurat normals. Reads the compiled cells from a
// file of doubles; prints particle steps per second and a checksum.
//
//   g++ -O3 -o splineLoop splineLoop.cpp && ./splineLoop cells.bin steps
//
// cells.bin: cells per axis, low x, low y, cell width x, cell width y, then 16 coefficients of each of 4 sums per cell.

#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <vector>

struct Random {
  uint64_t a = 0x9e3779b97f4a7c15ull, b = 0xbf58476d1ce4e5b9ull;
  double edges[257], densities[257];
  Random() {
    const double start = 3.6541528853610088, area = 0.00492867323399;
    auto density = [](double x) { return std::exp(-0.5 * x * x); };
    edges[0] = area / density(start);
    edges[1] = start;
    for (int i = 2; i < 256; i++) edges[i] = std::sqrt(-2 * std::log(area / edges[i - 1] + density(edges[i - 1])));
    edges[256] = 0;
    for (int i = 0; i <= 256; i++) densities[i] = density(edges[i]);
  }
  uint64_t next() {
    const uint64_t sum = a + b, t = a ^ b;
    a = ((a << 24) | (a >> 40)) ^ t ^ (t << 16);
    b = (t << 37) | (t >> 27);
    return sum;
  }
  double uniform() { return (next() >> 11) * 0x1p-53; }
  double normal() {
    for (;;) {
      const uint64_t word = next();
      const int layer = word >> 56;
      const double x = (int64_t(word << 8) >> 8) * 0x1p-55 * edges[layer];
      if (std::fabs(x) < edges[layer + 1]) return x;
      if (layer == 0) {
        double u, w;
        do {
          u = -std::log(1 - uniform()) / edges[1];
          w = -std::log(1 - uniform());
        } while (2 * w < u * u);
        return x < 0 ? -(edges[1] + u) : edges[1] + u;
      }
      if (densities[layer] + uniform() * (densities[layer + 1] - densities[layer]) < std::exp(-0.5 * x * x)) return x;
    }
  }
};

int main(int argc, char **argv) {
  if (argc < 3) return 2;
  FILE *file = std::fopen(argv[1], "rb");
  if (!file) return 2;
  double head[5];
  if (std::fread(head, sizeof(double), 5, file) != 5) return 2;
  const int n = int(head[0]);
  const double lowX = head[1], lowY = head[2], scaleX = 1 / head[3], scaleY = 1 / head[4];
  std::vector<double> table(size_t(n) * n * 64);
  if (std::fread(table.data(), sizeof(double), table.size(), file) != table.size()) return 2;
  const long steps = std::atol(argv[2]);
  const double h = 0.02, half = 0.5 * h;
  Random random;
  double best = 0, checksum = 0;
  for (int repeat = 0; repeat < 5; repeat++) {
    double x = 0.1, y = -0.2, vx = 0, vy = 0;
    const clock_t began = std::clock(); // processor time: others may be using the machine
    x += half * vx;
    y += half * vy;
    for (long i = 1; i <= steps; i++) {
      double u = (x - lowX) * scaleX, w = (y - lowY) * scaleY;
      u = u < 0 ? 0 : u > n ? n : u;
      w = w < 0 ? 0 : w > n ? n : w;
      int cx = int(u), cy = int(w);
      if (cx >= n) cx = n - 1;
      if (cy >= n) cy = n - 1;
      const double s = u - cx, t = w - cy;
      const double *c = &table[size_t(cx * n + cy) * 64];
      double value[4];
      for (int sum = 0; sum < 4; sum++, c += 16) {
        const double p = c[0] + t * (c[1] + t * (c[2] + t * c[3]));
        const double q = c[4] + t * (c[5] + t * (c[6] + t * c[7]));
        const double r = c[8] + t * (c[9] + t * (c[10] + t * c[11]));
        const double e = c[12] + t * (c[13] + t * (c[14] + t * c[15]));
        value[sum] = p + s * (q + s * (r + s * e));
      }
      const double friction = value[2] < 0 ? 0 : value[2], noise = value[3] < 0 ? 0 : value[3];
      const double kept = std::exp(-friction * h), twice = 2 * friction * h;
      const double variance = twice < 1e-6 ? noise * h * (1 - 0.5 * twice) : noise * (1 - kept * kept) / (2 * friction);
      const double spread = std::sqrt(variance);
      const double drift = i == steps ? half : h;
      vx = (vx + half * value[0]) * kept + spread * random.normal() + half * value[0];
      vy = (vy + half * value[1]) * kept + spread * random.normal() + half * value[1];
      x += drift * vx;
      y += drift * vy;
    }
    const double seconds = double(std::clock() - began) / CLOCKS_PER_SEC;
    if (steps / seconds > best) best = steps / seconds;
    checksum += x + y;
  }
  std::printf("%.6g %.6g\n", best, checksum);
}
