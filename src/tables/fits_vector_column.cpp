#include "tables/fits_vector_column.h"

#include <fitsio.h>
#include <fmt/format.h>

#include <memory>

#include "base/error.h"

namespace thirdrung {

namespace {

struct Closer {
  void operator()(fitsfile* file) const {
    int status = 0;
    fits_close_file(file, &status);
  }
};

void check(int status, const std::filesystem::path& path, const std::string& column, const std::string& what) {
  if (status == 0) return;
  char reason[FLEN_STATUS] = {};
  fits_get_errstatus(status, reason);
  throw InputError({path.string(), {}, column}, fmt::format("{} ({})", what, reason),
                   "check that the FITS file is whole and has this table");
}

}  // namespace

std::vector<std::vector<double>> read_fits_vectors(const std::filesystem::path& path, const std::string& table,
                                                   const std::string& column) {
  int status = 0;
  fitsfile* raw = nullptr;
  fits_open_file(&raw, path.c_str(), READONLY, &status);
  check(status, path, column, "cannot be opened as FITS");
  const std::unique_ptr<fitsfile, Closer> file(raw);
  std::string name = table;
  fits_movnam_hdu(raw, BINARY_TBL, name.data(), 0, &status);
  check(status, path, column, fmt::format("has no table {}", table));
  std::string wanted = column;
  int number = 0;
  fits_get_colnum(raw, CASEINSEN, wanted.data(), &number, &status);
  check(status, path, column, "has no such column");
  int type = 0;
  long repeat = 0;
  long width = 0;
  fits_get_coltype(raw, number, &type, &repeat, &width, &status);
  long rows = 0;
  fits_get_num_rows(raw, &rows, &status);
  check(status, path, column, "cannot be read");
  std::vector<double> all(static_cast<std::size_t>(rows * repeat));
  double null_value = 0;
  int any_null = 0;
  if (!all.empty()) {
    fits_read_col(raw, TDOUBLE, number, 1, 1, static_cast<LONGLONG>(all.size()), &null_value, all.data(), &any_null,
                  &status);
  }
  check(status, path, column, "cannot be read");
  std::vector<std::vector<double>> out(static_cast<std::size_t>(rows));
  for (std::size_t i = 0; i < out.size(); ++i) {
    const auto begin = all.begin() + static_cast<std::ptrdiff_t>(i) * repeat;
    out[i].assign(begin, begin + repeat);
  }
  return out;
}

}  // namespace thirdrung
