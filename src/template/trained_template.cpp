#include "template/trained_template.h"

namespace thirdrung {

SpectralTemplate moved_template(const SpectralTemplate& model, const Eigen::VectorXd& step) {
  const CoefficientLayout layout(model);
  SpectralTemplate out = model;
  layout.scatter(layout.gather(model) + step, out);
  return out;
}

}  // namespace thirdrung
