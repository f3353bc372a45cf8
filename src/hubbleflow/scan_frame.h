#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "hubbleflow/intercept.h"

namespace thirdrung {

/// What every scan starts from: a sample wider than the baseline's redshift range, one covariance for all of it, and
/// the baseline's weights.
///
/// Every variant is a linear estimate a = w . y with weights that vanish outside its subset, so that the error of a
/// difference is that of (w_1 - w_2) . y in the joint covariance, however much the subsets overlap.
class ScanFrame {
 public:
  /// @param sample all supernovae that any variant may use; the baseline is those in the options' redshift range.
  /// Throws as fit_intercept does.
  ScanFrame(FlowSample sample, const InterceptOptions& options);

  const FlowSample& sample() const { return sample_; }
  const InterceptOptions& options() const {
    return options_;
  }  ///< With q0 at the baseline's best value, if it is free.
  Eigen::Index size() const { return y_.size(); }
  const Eigen::VectorXd& single_intercepts() const { return y_; }
  const Eigen::MatrixXd& covariance() const { return covariance_; }  ///< Of the single intercepts.
  const Eigen::MatrixXd& weighting() const { return weighting_; }    ///< What weights are made from; often the same.
  const Eigen::MatrixXd& precision() const { return precision_; }    ///< Inverse of the weighting.
  const Eigen::MatrixXd& design() const { return design_; }
  const std::vector<bool>& baseline() const { return baseline_; }
  const Eigen::VectorXd& baseline_weights() const { return baseline_weights_; }
  double a_b() const { return a_b_; }
  double error() const { return error_; }

  /// Least-squares weights of a subset, of the full length, zero outside it. The cost is that of factoring the smaller
  /// of subset and complement: the inverse of a block follows from the block of the inverse.
  Eigen::VectorXd weights(const std::vector<bool>& members) const;
  double estimate(const Eigen::VectorXd& weights) const { return weights.dot(y_); }
  double error_of(const Eigen::VectorXd& combination) const;  ///< Of a linear combination of single intercepts.

 private:
  FlowSample sample_;
  InterceptOptions options_;
  Eigen::MatrixXd covariance_, weighting_, precision_, design_;
  Eigen::VectorXd y_, baseline_weights_;
  std::vector<bool> baseline_;
  double a_b_ = 0.0, error_ = 0.0;
};

/// One variant against the baseline.
struct ScanRow {
  std::string scan;                 ///< The axis.
  std::string setting;              ///< In words.
  std::vector<double> coordinates;  ///< The same in numbers, where the axis has any.
  std::size_t supernovae = 0;
  double a_b = 0.0;  ///< NaN where too few are left.
  double a_b_error = 0.0;
  double delta_ab = 0.0;        ///< Against the baseline.
  double delta_ab_error = 0.0;  ///< Of that difference.
  std::string caution;          ///< "" or a sentence.
};

/// A subset to be compared with the baseline.
struct NamedSubset {
  std::string setting;
  std::vector<double> coordinates;
  std::vector<bool> members;
};

/// One row a subset, with the look-elsewhere caution (look_elsewhere.h) at the most extreme. Subsets with too few
/// supernovae get a row without numbers that says so. Rows do not depend on the number of threads.
std::vector<ScanRow> scan_subsets(const ScanFrame& frame, const std::string& scan,
                                  const std::vector<NamedSubset>& subsets, int threads = 0);

/// The same against other members than the frame's own baseline, of which there must be enough.
std::vector<ScanRow> scan_subsets_against(const ScanFrame& frame, const std::vector<bool>& baseline,
                                          const std::string& scan, const std::vector<NamedSubset>& subsets,
                                          int threads = 0);

/// The difference of two subsets' intercepts as one row: delta_ab = first - second; a_b is left NaN.
ScanRow difference_of(const ScanFrame& frame, const std::string& scan, const std::string& setting,
                      const std::vector<bool>& first, const std::vector<bool>& second);

}  // namespace thirdrung
