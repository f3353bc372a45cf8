#pragma once

#include "template/spectral_template.h"

namespace thirdrung {

/// Fills Φ, Γ and K of a template with a rough guess: smooth U to I light curves of a normal Type Ia supernova, Γ = 0,
/// and a reddening-like K. Only the place where the iteration starts; a trained template does not remember it. The
/// gauge weights must be set: they fix the overall normalisation, without which the first step overshoots.
void crude_start(SpectralTemplate& model);

}  // namespace thirdrung
