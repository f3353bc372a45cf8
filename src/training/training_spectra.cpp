#include "training/training_spectra.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <map>
#include <span>

#include "base/parallel.h"
#include "tables/fits_image.h"

namespace thirdrung {

namespace {

/// ln template at the spectrum's wavelengths, its slope in phase, and the residual of the spectrum after its warp.
struct SpectrumTerms {
  Eigen::VectorXd residual;
  Eigen::VectorXd weight;
  Eigen::MatrixXd nuisance;  ///< Columns: warp basis, then slope in phase.
  CubicBasis::Weights phase;
  std::vector<CubicBasis::Weights> wave;
};

double used_phase(const TrainingSpectrum& spectrum) {
  return spectrum.phase + spectrum.phase_offset;
}

SpectrumTerms spectrum_terms(const SpectralTemplate& model, const TrainingSpectrum& spectrum, double scatter,
                             double share) {
  SpectrumTerms out;
  const auto n = spectrum.log_flux.size();
  const Eigen::VectorXd phi = model.phi_slice(used_phase(spectrum));
  const Eigen::VectorXd slope = model.phi_slice(used_phase(spectrum), true);
  out.phase = model.phase_basis.at(used_phase(spectrum));
  out.residual = spectrum.log_flux;
  out.weight.resize(n);
  out.nuisance = Eigen::MatrixXd::Zero(n, spectrum.warp.size() + 1);
  for (Eigen::Index i = 0; i < n; ++i) {
    const double wavelength = spectrum.wavelength[static_cast<std::size_t>(i)];
    const auto wave = model.wavelength_basis.at(wavelength);
    const auto warp = spectrum.warp.at(wavelength);
    double value = 0;
    double value_slope = 0;
    for (int k = 0; k < 4; ++k) {
      const auto at = static_cast<std::size_t>(k);
      value += wave.value[at] * phi(wave.first + k) + warp.value[at] * spectrum.warp_coefficients(warp.first + k);
      value_slope += wave.value[at] * slope(wave.first + k);
      out.nuisance(i, warp.first + k) = warp.value[at];
    }
    out.nuisance(i, spectrum.warp.size()) = value_slope;
    out.residual(i) -= value;
    const double variance = spectrum.log_flux_error(i) * spectrum.log_flux_error(i) + scatter * scatter;
    // Student-t weight of 4 degrees of freedom: host lines and telluric rests pull little.
    out.weight(i) = share / variance * 5.0 / (4.0 + out.residual(i) * out.residual(i) / variance);
    out.wave.push_back(wave);
  }
  return out;
}

struct Nuisance {
  Eigen::MatrixXd inverse;
  Eigen::VectorXd gradient;
};

Nuisance nuisance_system(const TrainingSpectrum& spectrum, const SpectrumTerms& terms) {
  Eigen::MatrixXd system = terms.nuisance.transpose() * terms.weight.asDiagonal() * terms.nuisance;
  Nuisance out;
  out.gradient = terms.nuisance.transpose() * terms.weight.cwiseProduct(terms.residual);
  const auto last = system.rows() - 1;
  const double prior = 1 / (spectrum.phase_error * spectrum.phase_error);
  system(last, last) += prior;
  out.gradient(last) -= prior * spectrum.phase_offset;
  // A weak prior on the warp keeps it determined where the spectrum has gaps.
  for (Eigen::Index k = 0; k < last; ++k) system(k, k) += 1e-4;
  out.gradient.head(last) -= 1e-4 * spectrum.warp_coefficients;
  out.inverse = Eigen::LLT<Eigen::MatrixXd>(system).solve(Eigen::MatrixXd::Identity(system.rows(), system.cols()));
  return out;
}

double share_of(const TrainingSpectrum& spectrum, double correlation_length) {
  const double step =
      spectrum.wavelength.size() > 1 ? spectrum.wavelength[1] - spectrum.wavelength[0] : correlation_length;
  return std::min(1.0, step / correlation_length);
}

/// −ln of the Student-t density whose weights spectrum_terms uses, so that a reweighted step can only lower it.
double half_chi2_of(const TrainingSpectrum& spectrum, const SpectrumTerms& terms, double scatter, double share) {
  const double pull = spectrum.phase_offset / spectrum.phase_error;
  double sum = 0.5 * (pull * pull + 1e-4 * spectrum.warp_coefficients.squaredNorm());
  for (Eigen::Index i = 0; i < terms.residual.size(); ++i) {
    const double variance = spectrum.log_flux_error(i) * spectrum.log_flux_error(i) + scatter * scatter;
    sum += 0.5 * share * 5.0 * std::log1p(terms.residual(i) * terms.residual(i) / (4.0 * variance));
  }
  return sum;
}

/// The bins of a spectrum that carry information: inside the range, positive, and of signal to noise above two.
TrainingSpectrum usable_bins(const std::string& name, std::span<const double> grid, std::span<const double> flux,
                             std::span<const double> error, const SpectraOptions& options) {
  TrainingSpectrum out;
  out.supernova = name;
  std::vector<double> log_flux;
  std::vector<double> log_error;
  for (std::size_t j = 0; j < grid.size() && j < flux.size(); ++j) {
    if (grid[j] < options.wavelength_min || grid[j] > options.wavelength_max) continue;
    if (!std::isfinite(flux[j]) || !std::isfinite(error[j]) || !(flux[j] > 2 * error[j])) continue;
    out.wavelength.push_back(grid[j]);
    log_flux.push_back(std::log(flux[j]));
    log_error.push_back(error[j] / flux[j]);
  }
  out.log_flux = Eigen::Map<const Eigen::VectorXd>(log_flux.data(), static_cast<Eigen::Index>(log_flux.size()));
  out.log_flux_error = Eigen::Map<const Eigen::VectorXd>(log_error.data(), static_cast<Eigen::Index>(log_error.size()));
  if (out.wavelength.size() < 2) return out;
  const double span = out.wavelength.back() - out.wavelength.front();
  const int pieces = std::max(1, static_cast<int>(std::round(span / options.warp_step)));
  std::vector<double> knots;
  for (int k = 0; k <= pieces; ++k) knots.push_back(out.wavelength.front() + span * k / pieces);
  out.warp = CubicBasis(knots);
  out.warp_coefficients = Eigen::VectorXd::Constant(out.warp.size(), 0.0);
  return out;
}

/// Contribution of one spectrum: (phase ⊗ phase) × a matrix over the wavelength coefficients.
struct SpectrumSystem {
  CubicBasis::Weights phase;
  int first = 0;
  Eigen::MatrixXd hessian;
  Eigen::VectorXd gradient;
  double half_chi2 = 0;
};

SpectrumSystem spectrum_system(const SpectralTemplate& model, const TrainingSpectrum& spectrum, double scatter,
                               double share) {
  const SpectrumTerms terms = spectrum_terms(model, spectrum, scatter, share);
  const Nuisance nuisance = nuisance_system(spectrum, terms);
  SpectrumSystem out;
  out.phase = terms.phase;
  out.half_chi2 = half_chi2_of(spectrum, terms, scatter, share);
  out.first = terms.wave.front().first;
  const int count = terms.wave.back().first + 4 - out.first;
  Eigen::MatrixXd cross = Eigen::MatrixXd::Zero(count, terms.nuisance.cols());
  out.hessian = Eigen::MatrixXd::Zero(count, count);
  out.gradient = Eigen::VectorXd::Zero(count);
  for (std::size_t i = 0; i < terms.wave.size(); ++i) {
    const auto row = static_cast<Eigen::Index>(i);
    const auto& wave = terms.wave[i];
    for (int a = 0; a < 4; ++a) {
      const double wa = terms.weight(row) * wave.value[static_cast<std::size_t>(a)];
      const int at = wave.first - out.first + a;
      out.gradient(at) += wa * terms.residual(row);
      cross.row(at) += wa * terms.nuisance.row(row);
      for (int b = 0; b < 4; ++b)
        out.hessian(at, wave.first - out.first + b) += wa * wave.value[static_cast<std::size_t>(b)];
    }
  }
  out.hessian -= cross * nuisance.inverse * cross.transpose();
  out.gradient -= cross * (nuisance.inverse * nuisance.gradient);
  return out;
}

}  // namespace

std::vector<TrainingSpectrum> read_training_spectra(const std::filesystem::path& path, const SpectraOptions& options,
                                                    std::vector<std::string>& left_out) {
  const FitsReader file(path);
  const Table table = file.table("SPECTRA");
  const FitsImage flux = file.array_column("SPECTRA", "flux");
  const FitsImage error = file.array_column("SPECTRA", "error");
  const std::vector<double> grid = file.table("WAVELENGTH").reals_in("wavelength", "Angstrom");
  if (flux.shape != error.shape || flux.shape.at(1) != grid.size()) {
    throw InputError({path.string(), {}, "flux"}, "flux, error and wavelength differ in length",
                     "give one flux and error a wavelength");
  }
  const auto row_of = [&](const FitsImage& image, std::size_t i) {
    return std::span<const double>(image.values).subspan(i * grid.size(), grid.size());
  };
  const auto names = table.strings("supernova");
  const auto quality = table.strings("phase_quality");
  const auto subtype = table.strings("subtype");
  const auto phase = table.reals("phase");
  const auto match_corr = table.reals("match_corr");
  const auto match_phase = table.reals("match_phase");
  const auto peak_error = table.reals("peak_error");
  std::map<std::string, int> count;
  std::vector<TrainingSpectrum> out;
  for (std::size_t i = 0; i < table.rows(); ++i) {
    const auto leave = [&](const std::string& why) { ++count[why]; };
    if (quality[i].empty() || options.phase_qualities.find(quality[i]) == std::string::npos) {
      leave("phase quality " + quality[i]);
    } else if (std::find(options.subtypes.begin(), options.subtypes.end(), subtype[i]) == options.subtypes.end()) {
      leave("subtype " + subtype[i]);
    } else if (!(match_corr[i] >= options.least_match)) {
      leave("unlike the mean sequence");
    } else if (!(std::abs(match_phase[i] - phase[i]) <= options.most_phase_mismatch)) {
      leave("phase contradicted by the features");
    } else if (!(phase[i] >= options.phase_min && phase[i] <= options.phase_max)) {
      leave("phase outside the range");
    } else {
      TrainingSpectrum spectrum = usable_bins(names[i], grid, row_of(flux, i), row_of(error, i), options);
      if (spectrum.wavelength.size() < 100) {
        leave("fewer than 100 usable bins");
        continue;
      }
      spectrum.phase = phase[i];
      const double own = std::isfinite(peak_error[i]) ? peak_error[i] : 1.0;
      spectrum.phase_error = std::hypot(own, options.phase_error);
      out.push_back(std::move(spectrum));
    }
  }
  for (const auto& [why, n] : count) left_out.push_back(fmt::format("{}: {}", why, n));
  return out;
}

double add_spectra(const SpectralTemplate& model, std::vector<TrainingSpectrum>& spectra, double scatter,
                   double correlation_length, int threads, NormalEquations* into) {
  std::vector<SpectrumSystem> systems(spectra.size());
  std::vector<double> half(spectra.size());
  parallel_for(spectra.size(), threads, [&](std::size_t i) {
    const double share = share_of(spectra[i], correlation_length);
    if (into) {
      systems[i] = spectrum_system(model, spectra[i], scatter, share);
      half[i] = systems[i].half_chi2;
    } else {
      half[i] = half_chi2_of(spectra[i], spectrum_terms(model, spectra[i], scatter, share), scatter, share);
    }
  });
  double sum = 0;
  for (const double value : half) sum += value;
  if (!into) return sum;
  const CoefficientLayout layout(model);
  for (const SpectrumSystem& system : systems) {
    const auto count = system.hessian.rows();
    for (int a = 0; a < 4; ++a) {
      const double pa = system.phase.value[static_cast<std::size_t>(a)];
      const int row = layout.phi(system.phase.first + a, system.first);
      into->gradient.segment(row, count) += pa * system.gradient;
      for (int b = 0; b <= a; ++b) {
        const double scale = pa * system.phase.value[static_cast<std::size_t>(b)];
        const int col = layout.phi(system.phase.first + b, system.first);
        if (a == b) {
          into->hessian.block(row, col, count, count).triangularView<Eigen::Lower>() += scale * system.hessian;
        } else {
          into->hessian.block(row, col, count, count) += scale * system.hessian;
        }
      }
    }
  }
  return sum;
}

void fit_warps(const SpectralTemplate& model, std::vector<TrainingSpectrum>& spectra, double scatter,
               double correlation_length, int threads) {
  parallel_for(spectra.size(), threads, [&](std::size_t i) {
    TrainingSpectrum& spectrum = spectra[i];
    const double share = share_of(spectrum, correlation_length);
    if (spectrum.warp_coefficients.isZero(0)) {
      // The basis sums to one, so equal coefficients are a plain offset: start there, or the robust weights see nothing
      // but outliers.
      spectrum.warp_coefficients.setConstant(spectrum_terms(model, spectrum, scatter, share).residual.mean());
    }
    double now = half_chi2_of(spectrum, spectrum_terms(model, spectrum, scatter, share), scatter, share);
    for (int step = 0; step < 10; ++step) {
      const SpectrumTerms terms = spectrum_terms(model, spectrum, scatter, share);
      const Nuisance nuisance = nuisance_system(spectrum, terms);
      Eigen::VectorXd move = nuisance.inverse * nuisance.gradient;
      TrainingSpectrum trial = spectrum;
      double then = 0;
      for (int half = 0; half < 6; ++half, move *= 0.3) {
        trial.warp_coefficients = spectrum.warp_coefficients + move.head(spectrum.warp.size());
        trial.phase_offset = spectrum.phase_offset + move(move.size() - 1);
        then = half_chi2_of(trial, spectrum_terms(model, trial, scatter, share), scatter, share);
        if (then <= now) break;
      }
      if (!(then < now)) break;
      const bool settled = now - then < 1e-6;
      spectrum.warp_coefficients = trial.warp_coefficients;
      spectrum.phase_offset = trial.phase_offset;
      now = then;
      if (settled) break;
    }
  });
}

double spectra_scatter(const SpectralTemplate& model, const std::vector<TrainingSpectrum>& spectra) {
  // Student-t of 4 degrees of freedom: its scale solves Σ [5 x/(4 + x) − 1] = 0 with x = r²/(σ² + scatter²).
  std::vector<std::pair<double, double>> terms;
  for (const TrainingSpectrum& spectrum : spectra) {
    const SpectrumTerms t = spectrum_terms(model, spectrum, 0.1, 1.0);
    for (Eigen::Index i = 0; i < t.residual.size(); ++i) {
      terms.emplace_back(t.residual(i) * t.residual(i), spectrum.log_flux_error(i) * spectrum.log_flux_error(i));
    }
  }
  double low = 0.005;
  double high = 1.0;
  while (high - low > 1e-6) {
    const double middle = 0.5 * (low + high);
    double sum = 0;
    for (const auto& [square, variance] : terms) {
      const double x = square / (variance + middle * middle);
      sum += (5 * x / (4 + x) - 1) / (variance + middle * middle);
    }
    (sum > 0 ? low : high) = middle;
  }
  return 0.5 * (low + high);
}

}  // namespace thirdrung
