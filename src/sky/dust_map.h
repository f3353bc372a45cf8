#pragma once

#include <filesystem>
#include <memory>
#include <optional>
#include <string>

#include "sky/position.h"

namespace thirdrung {

struct DustMapOptions {
  /// Every value of the map is multiplied by this. 1: the map as it stands. Schlafly & Finkbeiner 2011, ApJ 737, 103,
  /// find 0.86 for the E(B−V) of Schlegel, Finkbeiner & Davis 1998; it is applied only if asked for here.
  double recalibration = 1.0;
  std::string column;  ///< Column of a HEALPix table; the first if empty.
  /// Coordinates of a HEALPix map whose header does not say: "galactic" or "icrs".
  std::string healpix_frame;
};

/// Milky Way reddening E(B−V) over the sky, from a map that the user names.
///
/// Two layouts: a pair of FITS images in the Lambert zenithal equal-area projection about the Galactic poles, and a
/// HEALPix FITS table (Górski et al. 2005, ApJ 622, 759) in ring or nested order.
class DustMap {
 public:
  /// Lambert pair (Schlegel, Finkbeiner & Davis 1998, ApJ 500, 525, appendix C): with n = +1 for the northern image and
  /// −1 for the southern,
  ///   x = x_0 + S sqrt(1 − n sin b) cos l,  y = y_0 − n S sqrt(1 − n sin b) sin l.
  /// n is LAM_NSGP and S is LAM_SCAL of the header; x_0, y_0 from CRPIX1, CRPIX2 (less CRVAL1, CRVAL2 where CTYPE1 is
  /// LAMBERT--X). A header without LAM_SCAL must have CTYPE1 GLON-ZEA; S then follows from CD1_1 or CDELT1, n from
  /// CRVAL2. Bilinear between pixel centres. Throws InputError.
  static DustMap lambert(const std::filesystem::path& north, const std::filesystem::path& south,
                         const DustMapOptions& options = {});

  /// HEALPix table: NSIDE, ORDERING, COORDSYS (G or C) of the header; E(B−V) interpolated between the four nearest
  /// pixels. Throws InputError.
  static DustMap healpix(const std::filesystem::path& path, const DustMapOptions& options = {});

  /// E(B−V) [mag], recalibrated, at an ICRS position [deg]; nothing where the map has no value.
  std::optional<double> ebv(double ra, double dec) const;

  /// In words, for the provenance: layout, files and factor.
  const std::string& description() const { return description_; }

  /// The layouts behind the one interface.
  class Layout {
   public:
    virtual ~Layout() = default;
    virtual std::optional<double> value(double ra, double dec) const = 0;
  };

 private:
  DustMap(std::shared_ptr<const Layout> layout, double recalibration, std::string description);

  std::shared_ptr<const Layout> layout_;
  double recalibration_;
  std::string description_;
};

}  // namespace thirdrung
