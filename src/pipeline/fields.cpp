#include "pipeline/fields.h"

#include <cmath>

#include "base/constants.h"
#include "pipeline/inputs.h"

namespace thirdrung {

Table velocity_on_the_sky(const RunFile& run) {
  Table out;
  std::vector<double> ra, dec, v_pec;
  const VelocitySource source = run.redshift.options.velocity;
  if (source == VelocitySource::infall || source == VelocitySource::grid) {
    const RedshiftOptions options = read_redshift_options(run);
    constexpr int step = 6;
    for (int d = -90 + step / 2; d < 90; d += step) {
      const int count = std::max(1, static_cast<int>(std::lround(360.0 / step * std::cos(d * constants::degree))));
      for (int k = 0; k < count; ++k) {
        Supernova there;
        there.ra = 360.0 * (k + 0.5) / count;
        there.dec = d;
        there.z_helio = z_helio_from_cmb(field_redshift, galactic_from_icrs(there.ra, there.dec), options.sun);
        const Redshifts z = redshifts_of(there, options);
        ra.push_back(there.ra);
        dec.push_back(there.dec);
        v_pec.push_back(z.v_pec);
      }
    }
  }
  out.add_reals("ra", std::move(ra), "deg", "ICRS").add_reals("dec", std::move(dec), "deg", "ICRS");
  out.add_reals("v_pec", std::move(v_pec), "km / s", "peculiar velocity, away from us positive");
  out.set_meta("z_cmb", "0.03");
  return out;
}

}  // namespace thirdrung
