#pragma once

#include <filesystem>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "tables/fits_keywords.h"
#include "tables/table.h"

namespace thirdrung {

// FITS files of several parts (HDUs): named arrays of numbers and named tables, with keywords. Every part carries
// DATASUM and CHECKSUM (FITS standard 4.0, section 4.4.2.7), which are verified on reading where present. The same
// content gives the same bytes.

/// An n-dimensional array of numbers. The last axis varies fastest: `shape` {2, 3} is two rows of three.
/// (FITS counts its axes the other way: NAXIS1 is the last of `shape`.)
struct FitsImage {
  std::vector<std::size_t> shape;
  std::vector<double> values;
  std::string unit;
  std::vector<std::pair<std::string, std::string>> keywords;  ///< Keys in lower case, values as text.
};

/// Puts a FITS file together and writes it atomically.
///
///   FitsWriter writer;
///   writer.add_keyword({"revision", std::int64_t{2}, "of the layout"});
///   writer.add_image("covariance", {n, n}, values, "mag2");
///   writer.add_table(table, "parameters");
///   writer.write("fit.fits");
class FitsWriter {
 public:
  FitsWriter();
  ~FitsWriter();
  FitsWriter(FitsWriter&&) noexcept;
  FitsWriter& operator=(FitsWriter&&) noexcept;

  /// Keywords of the file as a whole (its primary header).
  FitsWriter& add_keyword(const FitsKeyword& keyword);
  FitsWriter& add_keywords(const FitsKeywords& keywords);

  /// @param name EXTNAME of the part. Names are told apart whatever their case; std::logic_error if it is taken, or if
  /// `values` does not have the size that `shape` says.
  /// @param as_float stores single precision.
  FitsWriter& add_image(const std::string& name, const std::vector<std::size_t>& shape, std::span<const double> values,
                        const std::string& unit = "", const std::string& comment = "", bool as_float = false,
                        const FitsKeywords& keywords = {});
  FitsWriter& add_table(const Table& table, const std::string& name, const FitsKeywords& keywords = {});

  /// Writes .fits or .fits.gz, by the ending. Call it once, at the end. Throws OutputError.
  void write(const std::filesystem::path& path);

 private:
  struct State;
  std::unique_ptr<State> state_;
};

/// Reads a FITS file of several parts. Where a `part` is asked for, "" is the primary HDU and any other name an
/// EXTNAME, whatever its case. Throws InputError for a file that is not sound, and for a part that it does not hold.
class FitsReader {
 public:
  explicit FitsReader(const std::filesystem::path& path);
  ~FitsReader();
  FitsReader(FitsReader&&) noexcept;
  FitsReader& operator=(FitsReader&&) noexcept;

  const std::string& file() const;
  /// EXTNAME of every part in order, "" where there is none.
  const std::vector<std::string>& names() const;
  bool has(const std::string& part) const;

  FitsImage image(const std::string& part) const;
  Table table(const std::string& part) const;
  /// Column with an array of fixed length in every cell: shape {rows, length}. Missing values are NaN.
  FitsImage array_column(const std::string& part, const std::string& column) const;

  std::optional<std::string> keyword(const std::string& key, const std::string& part = "") const;
  /// As keyword(); throws InputError if it is absent (or, for the second, not a number).
  std::string required_keyword(const std::string& key, const std::string& part = "") const;
  double real_keyword(const std::string& key, const std::string& part = "") const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace thirdrung
