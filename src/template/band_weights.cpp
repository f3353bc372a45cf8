#include "template/band_weights.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// Moments ∫ T λ u^k du, k = 0..3, of one cell of the grid, u its coordinate from 0 to 1.
using CellMoments = std::array<double, 4>;

/// Walks over the pieces between the corners of response and grid, both of which it meets in order.
class CellIntegrator {
 public:
  CellIntegrator(const Passband& passband, double cell_width) : passband_(passband), cell_width_(cell_width) {}

  /// Adds ∫ T λ u^k over the part of cell `index` that the table of the response covers [observer frame].
  CellMoments over(long index) {
    const auto& wavelength = passband_.wavelength();
    const auto& throughput = passband_.throughput();
    const double left = static_cast<double>(index) * cell_width_;
    const double right = left + cell_width_;
    CellMoments out{};
    while (piece_ + 1 < wavelength.size() && wavelength[piece_ + 1] <= left) ++piece_;
    for (std::size_t i = piece_; i + 1 < wavelength.size() && wavelength[i] < right; ++i) {
      const double from = std::max(left, wavelength[i]);
      const double to = std::min(right, wavelength[i + 1]);
      if (!(to > from) || (throughput[i] == 0.0 && throughput[i + 1] == 0.0)) continue;
      const double slope = (throughput[i + 1] - throughput[i]) / (wavelength[i + 1] - wavelength[i]);
      add(from, to, throughput[i] + slope * (from - wavelength[i]), slope, left, out);
    }
    return out;
  }

 private:
  /// T λ is quadratic on a piece, and times u³ of degree 5: three Gauss points are exact.
  void add(double from, double to, double start, double slope, double left, CellMoments& out) const {
    constexpr double node = 0.7745966692414834;
    constexpr double node_weight[3] = {5.0 / 18.0, 8.0 / 18.0, 5.0 / 18.0};
    constexpr double node_place[3] = {0.5 * (1 - node), 0.5, 0.5 * (1 + node)};
    const double width = to - from;
    for (int g = 0; g < 3; ++g) {
      const double offset = width * node_place[g];
      const double lambda = from + offset;
      const double u = (lambda - left) / cell_width_;
      double term = (start + slope * offset) * lambda * width * node_weight[g];
      for (double& moment : out) {
        moment += term;
        term *= u;
      }
    }
  }

  const Passband& passband_;
  double cell_width_;
  std::size_t piece_ = 0;
};

}  // namespace

BandWeights band_weights(const Passband& passband, double z, const Extinction& dust, double ebv, double step) {
  BandWeights out;
  out.step = step;
  out.mean_wavelength = passband.mean_wavelength() / (1 + z);
  const double observed_step = step * (1 + z);
  const auto first_cell = static_cast<long>(std::floor(passband.blue_edge() / observed_step));
  const auto last_cell = static_cast<long>(std::ceil(passband.red_edge() / observed_step)) - 1;
  const auto count = static_cast<std::size_t>(last_cell - first_cell + 4);
  out.weight.assign(count, 0.0);
  CellIntegrator integrator(passband, observed_step);
  for (long cell = first_cell; cell <= last_cell; ++cell) {
    const CellMoments m = integrator.over(cell);
    // Cubic Lagrange polynomials on the points −1, 0, 1, 2 of the cell's coordinate, integrated term by term.
    double* w = out.weight.data() + (cell - first_cell);
    w[0] += (-m[3] + 3 * m[2] - 2 * m[1]) / 6;
    w[1] += (m[3] - 2 * m[2] - m[1] + 2 * m[0]) / 2;
    w[2] += (-m[3] + m[2] + 2 * m[1]) / 2;
    w[3] += (m[3] - m[1]) / 6;
  }
  const double to_ujy = constants::ab_zero_jansky * 1e6 /
                        (constants::planck_times_c_erg_angstrom * passband.photon_rate_ab_zero() * (1 + z));
  out.wavelength.resize(count);
  for (std::size_t j = 0; j < count; ++j) {
    out.wavelength[j] = static_cast<double>(first_cell - 1 + static_cast<long>(j)) * step;
    out.weight[j] *= to_ujy;
    if (ebv != 0.0) {
      out.weight[j] *= std::exp(-constants::ln_flux_per_mag * dust.magnitudes(out.wavelength[j] * (1 + z), ebv));
    }
  }
  return out;
}

}  // namespace thirdrung
