#include "lightcurve/remarks.h"

#include <stdexcept>

namespace thirdrung {

std::string text_of(Remark remark) {
  switch (remark) {
    case Remark::no_usable_epoch:
      return "no epoch within the template's phases and wavelengths";
    case Remark::no_positive_flux:
      return "no positive flux that looks like a supernova";
    case Remark::undetermined:
      return "too few epochs to tell t_0 and m_B";
    case Remark::not_converged:
      return "not converged";
    case Remark::too_few_epochs:
      return "too few epochs, s and c held by wide priors";
    case Remark::one_band:
      return "only one band, c held by a wide prior";
    case Remark::s_at_bound:
      return "s at its bound";
    case Remark::c_at_bound:
      return "c at its bound";
    case Remark::t_0_at_bound:
      return "t_0 at the end of its window";
    case Remark::competing_solution:
      return "another t_0 fits nearly as well";
    case Remark::weakly_determined:
      return "weakly determined";
    case Remark::starts_late:
      return "data start late";
    case Remark::improbable:
      return "chi2 too large to be chance";
    case Remark::many_mistrusted:
      return "many epochs mistrusted";
    case Remark::t_0_outside_data:
      return "t_0 outside the data";
    case Remark::epochs_mistrusted:
      return "some epochs mistrusted";
    case Remark::bands_left_out:
      return "some bands left out";
    case Remark::epochs_reselected:
      return "epochs chosen twice";
  }
  throw std::logic_error("a remark without words");
}

std::string text_of(std::span<const Remark> remarks) {
  std::string out;
  for (const Remark remark : remarks) {
    if (!out.empty()) out += "; ";
    out += text_of(remark);
  }
  return out;
}

bool voids_trust(Remark remark) {
  switch (remark) {
    case Remark::t_0_outside_data:
    case Remark::epochs_mistrusted:
    case Remark::bands_left_out:
    case Remark::epochs_reselected:
      return false;
    default:
      return true;
  }
}

}  // namespace thirdrung
