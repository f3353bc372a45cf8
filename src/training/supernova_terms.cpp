#include "training/supernova_terms.h"

#include <cmath>

#include "base/constants.h"

namespace thirdrung {

namespace {

double dot4(const std::array<double, 4>& w, const double* c) {
  return w[0] * c[0] + w[1] * c[1] + w[2] * c[2] + w[3] * c[3];
}

/// Wavelength coefficients of one band at one phase: the phase basis summed out over the range the band touches.
Eigen::VectorXd band_slice(const Eigen::MatrixXd& coefficients, const CubicBasis::Weights& phase, int first,
                           int count) {
  const Eigen::Map<const Eigen::RowVector4d> weights(phase.value.data());
  return (weights * coefficients.block(phase.first, first, 4, count)).transpose();
}

void spread(const std::array<double, 4>& w, double amount, double* into) {
  for (std::size_t k = 0; k < 4; ++k) into[k] += amount * w[k];
}

}  // namespace

SupernovaModel evaluate_supernova(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, std::vector<EpochGradient>* gradients) {
  const auto n = static_cast<Eigen::Index>(sn.epochs.size());
  SupernovaModel out{Eigen::VectorXd::Zero(n), Locals::Zero(n, 4)};
  if (gradients) gradients->assign(sn.epochs.size(), {});
  const double amplitude = std::exp(-constants::ln_flux_per_mag * at.m_b);
  const double u = at.s - 1;
  for (const TrainingBand& band : sn.bands) {
    const std::size_t points = band.weights.weight.size();
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const double q = (sn.epochs[e].mjd - at.t_0) / ((1 + sn.z_helio) * at.s);
      const auto phase = model.phase_basis.at(q);
      const auto phase_slope = model.phase_basis.slope_at(q);
      const auto g_phase = model.stretch_phase_basis.at(q);
      const auto g_phase_slope = model.stretch_phase_basis.slope_at(q);
      const Eigen::VectorXd phi = band_slice(model.log_flux, phase, band.phi_first, band.phi_count);
      const Eigen::VectorXd phi_slope = band_slice(model.log_flux, phase_slope, band.phi_first, band.phi_count);
      const Eigen::VectorXd gamma = band_slice(model.stretch_response, g_phase, band.gamma_first, band.gamma_count);
      const Eigen::VectorXd gamma_slope =
          band_slice(model.stretch_response, g_phase_slope, band.gamma_first, band.gamma_count);
      EpochGradient* gradient = gradients ? &(*gradients)[e] : nullptr;
      if (gradient) {
        gradient->phi_phase = phase;
        gradient->gamma_phase = g_phase;
        gradient->phi = Eigen::VectorXd::Zero(band.phi_count);
        gradient->gamma_share = Eigen::VectorXd::Zero(band.gamma_count);
        gradient->colour_share = Eigen::VectorXd::Zero(band.colour_count);
      }
      double flux = 0;
      double by_q = 0;
      double by_u = 0;
      double by_c = 0;
      for (std::size_t j = 0; j < points; ++j) {
        const int phi_at = band.phi[j].first - band.phi_first;
        const int gamma_at = band.gamma[j].first - band.gamma_first;
        const double g = dot4(band.gamma[j].value, gamma.data() + gamma_at);
        const double k = dot4(band.colour[j].value, model.colour_law.data() + band.colour[j].first);
        const double log_f =
            dot4(band.phi[j].value, phi.data() + phi_at) + u * g - constants::ln_flux_per_mag * at.c * k;
        const double f = amplitude * band.weights.weight[j] * std::exp(log_f);
        flux += f;
        by_q += f * (dot4(band.phi[j].value, phi_slope.data() + phi_at) +
                     u * dot4(band.gamma[j].value, gamma_slope.data() + gamma_at));
        by_u += f * g;
        by_c -= f * constants::ln_flux_per_mag * k;
        if (gradient) {
          spread(band.phi[j].value, f, gradient->phi.data() + phi_at);
          spread(band.gamma[j].value, f, gradient->gamma_share.data() + gamma_at);
          spread(band.colour[j].value, f, gradient->colour_share.data() + band.colour[j].first - band.colour_first);
        }
      }
      if (gradient) {
        gradient->gamma = u * gradient->gamma_share;
        gradient->colour = -constants::ln_flux_per_mag * at.c * gradient->colour_share;
      }
      const auto row = static_cast<Eigen::Index>(e);
      out.flux(row) = flux;
      out.by_unknowns(row, 0) = -by_q / ((1 + sn.z_helio) * at.s);
      out.by_unknowns(row, 1) = -constants::ln_flux_per_mag * flux;
      out.by_unknowns(row, 2) = by_u - by_q * q / at.s;
      out.by_unknowns(row, 3) = by_c;
    }
  }
  return out;
}

SupernovaNoise supernova_noise(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                               const Eigen::VectorXd& flux, const Eigen::VectorXd& robust_weight) {
  SupernovaNoise out;
  out.variance.resize(flux.size());
  for (const TrainingBand& band : sn.bands) {
    const double wavelength = band.weights.mean_wavelength;
    out.colour_scatter.push_back(model.colour_scatter(wavelength));
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      const double phase = (sn.epochs[e].mjd - at.t_0) / (1 + sn.z_helio);
      const double scatter = model.epoch_scatter(phase, wavelength) * flux(row);
      out.variance(row) = (sn.epochs[e].flux_error * sn.epochs[e].flux_error + scatter * scatter) / robust_weight(row);
    }
  }
  return out;
}

Eigen::MatrixXd apply_inverse(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& flux,
                              const Eigen::MatrixXd& rows) {
  Eigen::MatrixXd out = noise.variance.cwiseInverse().asDiagonal() * rows;
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const auto begin = static_cast<Eigen::Index>(sn.bands[b].begin);
    const auto count = static_cast<Eigen::Index>(sn.bands[b].end) - begin;
    const auto f = flux.segment(begin, count);
    const Eigen::VectorXd v = f.cwiseQuotient(noise.variance.segment(begin, count));
    const double square = noise.colour_scatter[b] * noise.colour_scatter[b];
    const double shrink = square / (1 + square * f.dot(v));
    const Eigen::RowVectorXd projected = shrink * (v.transpose() * rows.middleRows(begin, count));
    out.middleRows(begin, count) -= v * projected;
  }
  return out;
}

double log_determinant(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& flux) {
  double out = noise.variance.array().log().sum();
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const auto begin = static_cast<Eigen::Index>(sn.bands[b].begin);
    const auto count = static_cast<Eigen::Index>(sn.bands[b].end) - begin;
    const auto f = flux.segment(begin, count);
    const double square = noise.colour_scatter[b] * noise.colour_scatter[b];
    out += std::log1p(square * f.cwiseAbs2().cwiseQuotient(noise.variance.segment(begin, count)).sum());
  }
  return out;
}

void add_gradient(const CoefficientLayout& layout, const TrainingBand& band, const EpochGradient& gradient,
                  double scale, Eigen::Ref<Eigen::VectorXd> into) {
  for (int i = 0; i < 4; ++i) {
    const auto k = static_cast<std::size_t>(i);
    into.segment(layout.phi(gradient.phi_phase.first + i, band.phi_first), band.phi_count) +=
        scale * gradient.phi_phase.value[k] * gradient.phi;
    into.segment(layout.gamma(gradient.gamma_phase.first + i, band.gamma_first), band.gamma_count) +=
        scale * gradient.gamma_phase.value[k] * gradient.gamma;
  }
  into.segment(layout.colour(band.colour_first), band.colour_count) += scale * gradient.colour;
}

double gradient_along(const CoefficientLayout& layout, const TrainingBand& band, const EpochGradient& gradient,
                      const Eigen::VectorXd& direction) {
  double out = gradient.colour.dot(direction.segment(layout.colour(band.colour_first), band.colour_count));
  for (int i = 0; i < 4; ++i) {
    const auto k = static_cast<std::size_t>(i);
    out += gradient.phi_phase.value[k] * gradient.phi.dot(direction.segment(
                                             layout.phi(gradient.phi_phase.first + i, band.phi_first), band.phi_count));
    out += gradient.gamma_phase.value[k] *
           gradient.gamma.dot(
               direction.segment(layout.gamma(gradient.gamma_phase.first + i, band.gamma_first), band.gamma_count));
  }
  return out;
}

}  // namespace thirdrung
