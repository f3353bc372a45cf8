#include "pipeline/join_stage.h"

#include "base/error.h"
#include "ladder/absolute_magnitude_join.h"
#include "sample/supernova.h"

namespace thirdrung {

Table join_of(const RunFile& run, const Table& intercept) {
  const auto names = intercept.strings("quantity");
  const auto values = intercept.reals("value"), errors = intercept.reals("error");
  for (std::size_t i = 0; i < names.size(); ++i) {
    if (names[i] != "a_b") continue;
    const HubbleConstant joined = join_absolute_magnitude(values[i], errors[i], run.join.m_b, run.join.m_b_error);
    Table out;
    out.add_strings("quantity", {"h0", "log10_h0", "m_b", "share_of_calibration"});
    out.add_reals("value", {joined.h0, joined.log10_h0, run.join.m_b, joined.share_of_calibration});
    out.add_reals("error", {joined.error, joined.log10_h0_error, run.join.m_b_error, missing_value}, "", "1 sigma");
    out.add_strings("unit_of_value", {"km / s / Mpc", "", "mag", ""});
    out.add_strings("meaning", {"Hubble constant", "its logarithm", "absolute magnitude given in the run file",
                                "of the variance of log10 H0, from the absolute magnitude"});
    return out;
  }
  throw InputError(intercept.place("quantity"), "has no a_b", "make the intercept again");
}

}  // namespace thirdrung
