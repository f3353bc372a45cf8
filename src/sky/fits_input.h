#pragma once

#include <filesystem>
#include <optional>
#include <string>
#include <vector>

namespace thirdrung {

/// A FITS file opened for reading, plain or gzipped; closes itself. Every fault is an InputError that names the file.
class FitsInput {
 public:
  /// Throws InputError if the file is missing, not FITS, or cut short.
  explicit FitsInput(const std::filesystem::path& path);
  ~FitsInput();
  FitsInput(const FitsInput&) = delete;
  FitsInput& operator=(const FitsInput&) = delete;

  /// Moves to the first image with at least `axes` axes. Throws InputError if there is none.
  void to_image(int axes);
  /// Moves to the first binary table. Throws InputError if there is none.
  void to_table();

  /// Keyword of the present extension; nothing if absent.
  std::optional<double> number(const std::string& keyword) const;
  std::optional<std::string> text(const std::string& keyword) const;
  /// As above, but throws InputError if absent.
  double required_number(const std::string& keyword) const;
  std::string required_text(const std::string& keyword) const;

  std::vector<long> image_size() const;
  /// Every pixel of the image, first axis fastest; blanks are NaN.
  std::vector<float> image() const;
  /// Every element of a column, cell after cell. Column by name, or the first if empty.
  std::vector<float> column(const std::string& name) const;

  const std::string& name() const { return name_; }

 private:
  [[noreturn]] void fail(const std::string& fault, const std::string& remedy, const std::string& keyword = "") const;
  void check(int status, const std::string& doing) const;

  std::string name_;
  void* file_ = nullptr;  ///< CFITSIO's handle; void so that users of this header need no CFITSIO.
};

}  // namespace thirdrung
