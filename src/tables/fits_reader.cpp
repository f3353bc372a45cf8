#include <fmt/format.h>

#include <array>
#include <cctype>
#include <limits>
#include <numeric>

#include "base/error.h"
#include "base/text.h"
#include "tables/cells.h"
#include "tables/fits_handle.h"
#include "tables/fits_image.h"
#include "tables/fits_table.h"

namespace thirdrung {

namespace {

bool same_name(const std::string& a, const std::string& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(),
                    [](unsigned char x, unsigned char y) { return std::tolower(x) == std::tolower(y); });
}

}  // namespace

struct FitsReader::State {
  FitsHandle fits;
  std::vector<std::string> names;

  explicit State(const std::filesystem::path& path) : fits(read_file(path), path.string()) {
    const int count = fits.hdus();
    for (int hdu = 1; hdu <= count; ++hdu) {
      fits.move_to(hdu);
      names.push_back(fits.name());
    }
  }

  /// Number of the HDU, from 1; 0 if there is none.
  int find(const std::string& part) const {
    if (part.empty()) return 1;
    for (std::size_t i = 0; i < names.size(); ++i) {
      if (same_name(names[i], part)) return static_cast<int>(i) + 1;
    }
    return 0;
  }

  /// Stands on the part; throws unless it is an image, or a table, as asked.
  void go_to(const std::string& part, bool to_image) const {
    go_to(part);
    int type = 0;
    int status = 0;
    fits_get_hdu_type(fits.get(), &type, &status);
    fits.check(status);
    if ((type == IMAGE_HDU) != to_image)
      fail(fmt::format("its part \"{}\" is not {}", part, to_image ? "an array" : "a table"));
  }

  void go_to(const std::string& part) const {
    const int hdu = find(part);
    if (hdu == 0) fail(fmt::format("has no part \"{}\" among {}", part, fmt::join(names, ", ")));
    fits.move_to(hdu);
  }

  [[noreturn]] void fail(const std::string& fault) const {
    throw InputError({fits.file(), {}, {}}, fault, "check that this is the right file");
  }
};

FitsReader::FitsReader(const std::filesystem::path& path) : state_(std::make_unique<State>(path)) {}
FitsReader::~FitsReader() = default;
FitsReader::FitsReader(FitsReader&&) noexcept = default;
FitsReader& FitsReader::operator=(FitsReader&&) noexcept = default;

const std::string& FitsReader::file() const {
  return state_->fits.file();
}
const std::vector<std::string>& FitsReader::names() const {
  return state_->names;
}
bool FitsReader::has(const std::string& part) const {
  return state_->find(part) != 0;
}

FitsImage FitsReader::image(const std::string& part) const {
  state_->go_to(part, true);
  const FitsHandle& fits = state_->fits;
  int dimensions = 0;
  int status = 0;
  fits_get_img_dim(fits.get(), &dimensions, &status);
  fits.check(status);
  std::vector<LONGLONG> axes(static_cast<std::size_t>(dimensions));
  fits_get_img_sizell(fits.get(), dimensions, axes.data(), &status);
  fits.check(status);
  FitsImage result;
  result.shape.assign(axes.rbegin(), axes.rend());
  const std::size_t size =
      dimensions == 0 ? 0
                      : std::accumulate(result.shape.begin(), result.shape.end(), std::size_t{1}, std::multiplies<>());
  result.values.resize(size);
  if (size > 0) {
    // As in read_real_column(): among floating-point numbers CFITSIO must not look for missing ones.
    double nan = std::numeric_limits<double>::quiet_NaN();
    int bits = 0;
    int any = 0;
    fits_get_img_type(fits.get(), &bits, &status);
    fits_read_img(fits.get(), TDOUBLE, 1, static_cast<LONGLONG>(size), bits < 0 ? nullptr : &nan, result.values.data(),
                  &any, &status);
    fits.check(status);
  }
  result.unit = read_keyword(fits, "BUNIT").value_or("");
  result.keywords = read_keywords(fits);
  return result;
}

Table FitsReader::table(const std::string& part) const {
  state_->go_to(part, false);
  return read_fits_table(state_->fits);
}

FitsImage FitsReader::array_column(const std::string& part, const std::string& column) const {
  state_->go_to(part, false);
  const FitsHandle& fits = state_->fits;
  int number = 0;
  int status = 0;
  std::string name = column;
  fits_get_colnum(fits.get(), CASEINSEN, name.data(), &number, &status);
  if (status == COL_NOT_FOUND) {
    fits_clear_errmsg();
    state_->fail(fmt::format("its table \"{}\" has no column \"{}\"", part, column));
  }
  fits.check(status);
  int type = 0;
  long repeat = 0;
  LONGLONG rows = 0;
  fits_get_eqcoltype(fits.get(), number, &type, &repeat, nullptr, &status);
  fits_get_num_rowsll(fits.get(), &rows, &status);
  fits.check(status);
  if (type < 0 || type == TSTRING || type == TLOGICAL || type == TBIT || type == TCOMPLEX || type == TDBLCOMPLEX) {
    state_->fail(
        fmt::format("column \"{}\" of its table \"{}\" holds no arrays of real numbers of one length", column, part));
  }
  FitsImage result;
  result.shape = {static_cast<std::size_t>(rows), static_cast<std::size_t>(repeat)};
  result.values = read_real_column(fits, number, result.shape[0] * result.shape[1]);
  result.unit = read_keyword(fits, fmt::format("TUNIT{}", number)).value_or("");
  return result;
}

std::optional<std::string> FitsReader::keyword(const std::string& key, const std::string& part) const {
  state_->go_to(part);
  return read_keyword(state_->fits, key);
}

std::string FitsReader::required_keyword(const std::string& key, const std::string& part) const {
  if (auto value = keyword(key, part)) return *std::move(value);
  state_->fail(fmt::format("has no keyword {} in part \"{}\"", key, part));
}

double FitsReader::real_keyword(const std::string& key, const std::string& part) const {
  const std::string text = required_keyword(key, part);
  const auto value = parse_real(trimmed(text));
  if (!value) state_->fail(fmt::format("its keyword {} is {}, not a number", key, quoted_for_message(text)));
  return *value;
}

}  // namespace thirdrung
