#include "pipeline/shift_list.h"

#include <fmt/format.h>

#include <Eigen/SVD>
#include <set>

namespace thirdrung {

void condense(std::vector<SystematicShift>& shifts, const std::string& stem) {
  std::vector<SystematicShift> others, members;
  for (SystematicShift& one : shifts) (one.name.starts_with(stem) ? members : others).push_back(std::move(one));
  shifts = std::move(others);
  if (members.empty()) return;
  Eigen::MatrixXd matrix(members.front().shift.size(), static_cast<Eigen::Index>(members.size()));
  for (std::size_t k = 0; k < members.size(); ++k) matrix.col(static_cast<Eigen::Index>(k)) = members[k].shift;
  const Eigen::BDCSVD<Eigen::MatrixXd> principal(matrix, Eigen::ComputeThinU);
  const Eigen::VectorXd& size = principal.singularValues();
  double left = size.squaredNorm();
  const double enough = 1e-4 * left;
  for (Eigen::Index k = 0; k < size.size() && left > enough; ++k) {
    SystematicShift one = members.front();
    one.name = fmt::format("template direction {}", k + 1);
    one.shift = size(k) * principal.matrixU().col(k);
    if (one.shift.sum() < 0) one.shift = -one.shift;
    shifts.push_back(std::move(one));
    left -= size(k) * size(k);
  }
}

void make_names_unique(std::vector<SystematicShift>& shifts) {
  std::set<std::string> names;
  for (SystematicShift& one : shifts) {
    const std::string name = one.name;
    for (int copy = 2; !names.insert(one.name).second; ++copy) one.name = fmt::format("{} ({})", name, copy);
  }
}

}  // namespace thirdrung
