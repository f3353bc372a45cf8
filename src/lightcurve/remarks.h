#pragma once

#include <span>
#include <string>
#include <vector>

namespace thirdrung {

/// What a reader of a light-curve fit has to know of it.
enum class Remark {
  no_usable_epoch,     ///< No epoch in a covered band within the template's phases.
  no_positive_flux,    ///< Nowhere in the scan did a positive amplitude fit.
  undetermined,        ///< So few epochs that t_0 or m_B could be anything; there are no numbers then.
  not_converged,       ///< The parameters still moved after the last iteration.
  too_few_epochs,      ///< Fewer epochs than parameters plus one: s and c were held by wide priors.
  one_band,            ///< Only one band: c was held by a wide prior.
  s_at_bound,          ///< Best s at its bound.
  c_at_bound,          ///< Best c at its bound.
  t_0_at_bound,        ///< Best t_0 at the end of the window searched.
  competing_solution,  ///< Another solution, far in t_0, is nearly as good.
  weakly_determined,   ///< An error is too large for a Gaussian to describe it.
  starts_late,         ///< Data that start late do not tell t_0 well.
  improbable,          ///< χ² is too large to be chance.
  many_mistrusted,     ///< The robust loss had to dismiss a good part of the epochs.
  t_0_outside_data,    ///< All epochs used are on one side of t_0.
  epochs_mistrusted,   ///< The robust loss gave some epochs little weight.
  bands_left_out,      ///< Some bands reach outside the template.
  epochs_reselected    ///< The fit moved so far that its phase window took in other epochs still.
};

/// The remark in words, for tables and messages.
std::string text_of(Remark remark);
/// All remarks, joined by "; ".
std::string text_of(std::span<const Remark> remarks);

/// Whether a fit with this remark is not to be trusted. The last four of the list are information only.
bool voids_trust(Remark remark);

}  // namespace thirdrung
