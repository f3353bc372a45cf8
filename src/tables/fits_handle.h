#pragma once

#include <fitsio.h>

#include <string>
#include <string_view>

namespace thirdrung {

/// A FITS file in memory, held open in CFITSIO. For the sources of this room; others use fits_image.h.
///
/// Files are read and written whole, by the same functions as every other file: CFITSIO never sees a name, so that no
/// character of a name has a special meaning to it, and a full disk is reported like any other.
class FitsHandle {
 public:
  /// A new file with an empty primary header.
  FitsHandle();
  /// An existing one, packed with gzip or not. Throws InputError if it is not FITS, cut short, or differs from its own
  /// checksums. @param file name for errors.
  FitsHandle(std::string content, std::string file);
  FitsHandle(const FitsHandle&) = delete;
  FitsHandle& operator=(const FitsHandle&) = delete;
  ~FitsHandle();

  fitsfile* get() const { return fits_; }
  const std::string& file() const { return file_; }
  int hdus() const;
  void move_to(int hdu) const;
  /// EXTNAME of the current HDU, "" if it has none.
  std::string name() const;

  /// Throws InputError (a file that was read) or OutputError (a new one) for a CFITSIO status that is not 0.
  void check(int status) const;

  /// Adds checksums to every HDU and returns the bytes of the file.
  std::string finish();

 private:
  void verify() const;
  void add_checksums() const;

  std::string file_;
  std::string content_;  ///< Of a file that was read.
  void* buffer_ = nullptr;
  std::size_t size_ = 0;
  fitsfile* fits_ = nullptr;
  bool is_new_;
};

/// True if the content is FITS.
bool looks_like_fits(std::string_view content);

}  // namespace thirdrung
