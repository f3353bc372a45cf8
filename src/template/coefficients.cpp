#include "template/coefficients.h"

namespace thirdrung {

using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

CoefficientLayout::CoefficientLayout(const SpectralTemplate& model)
    : phi_phases(model.phase_basis.size()),
      phi_wavelengths(model.wavelength_basis.size()),
      gamma_phases(model.stretch_phase_basis.size()),
      gamma_wavelengths(model.stretch_wavelength_basis.size()),
      colours(model.colour_basis.size()) {}

Eigen::VectorXd CoefficientLayout::gather(const SpectralTemplate& model) const {
  Eigen::VectorXd out(size());
  Eigen::Map<RowMajor>(out.data(), phi_phases, phi_wavelengths) = model.log_flux;
  Eigen::Map<RowMajor>(out.data() + gamma_start(), gamma_phases, gamma_wavelengths) = model.stretch_response;
  out.tail(colours) = model.colour_law;
  return out;
}

void CoefficientLayout::scatter(const Eigen::VectorXd& coefficients, SpectralTemplate& model) const {
  model.log_flux = Eigen::Map<const RowMajor>(coefficients.data(), phi_phases, phi_wavelengths);
  model.stretch_response =
      Eigen::Map<const RowMajor>(coefficients.data() + gamma_start(), gamma_phases, gamma_wavelengths);
  model.colour_law = coefficients.tail(colours);
}

}  // namespace thirdrung
