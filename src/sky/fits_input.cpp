#include "sky/fits_input.h"

#include <fitsio.h>
#include <fmt/format.h>

#include <array>
#include <cmath>
#include <limits>

#include "base/error.h"

namespace thirdrung {
namespace {

fitsfile* handle(void* file) {
  return static_cast<fitsfile*>(file);
}

constexpr float blank = std::numeric_limits<float>::quiet_NaN();

std::string reason(int status) {
  std::array<char, FLEN_STATUS> text = {};
  fits_get_errstatus(status, text.data());
  return text.data();
}

}  // namespace

FitsInput::FitsInput(const std::filesystem::path& path) : name_(path.string()) {
  if (!std::filesystem::exists(path)) fail("does not exist", "check the path in the run file");
  fitsfile* file = nullptr;
  int status = 0;
  fits_open_diskfile(&file, name_.c_str(), READONLY, &status);
  file_ = file;
  if (status != 0) {
    file_ = nullptr;
    fits_clear_errmsg();
    fail("is not a readable FITS file (" + reason(status) + ")", "give a complete FITS file, plain or gzipped");
  }
}

FitsInput::~FitsInput() {
  int status = 0;
  if (file_ != nullptr) fits_close_file(handle(file_), &status);
}

void FitsInput::fail(const std::string& fault, const std::string& remedy, const std::string& keyword) const {
  throw InputError({name_, std::nullopt, keyword}, fault, remedy);
}

void FitsInput::check(int status, const std::string& doing) const {
  if (status == 0) return;
  fits_clear_errmsg();
  fail(fmt::format("cannot be read while {} ({})", doing, reason(status)),
       "the file is cut short or damaged: get it again");
}

void FitsInput::to_image(int axes) {
  int status = 0;
  int count = 0;
  fits_get_num_hdus(handle(file_), &count, &status);
  check(status, "counting its extensions");
  for (int hdu = 1; hdu <= count; ++hdu) {
    int type = 0;
    int dimensions = 0;
    fits_movabs_hdu(handle(file_), hdu, &type, &status);
    if (type == IMAGE_HDU) fits_get_img_dim(handle(file_), &dimensions, &status);
    check(status, "looking for an image");
    if (type == IMAGE_HDU && dimensions >= axes) return;
  }
  fail(fmt::format("holds no image of {} or more axes", axes), "name the file that holds the map itself");
}

void FitsInput::to_table() {
  int status = 0;
  int count = 0;
  fits_get_num_hdus(handle(file_), &count, &status);
  check(status, "counting its extensions");
  for (int hdu = 1; hdu <= count; ++hdu) {
    int type = 0;
    fits_movabs_hdu(handle(file_), hdu, &type, &status);
    check(status, "looking for a table");
    if (type == BINARY_TBL) return;
  }
  fail("holds no binary table", "name the file that holds the map itself");
}

std::optional<double> FitsInput::number(const std::string& keyword) const {
  int status = 0;
  double value = 0.0;
  fits_read_key(handle(file_), TDOUBLE, keyword.c_str(), &value, nullptr, &status);
  if (status == KEY_NO_EXIST) {
    fits_clear_errmsg();
    return std::nullopt;
  }
  if (status != 0 || !std::isfinite(value)) {
    fits_clear_errmsg();
    fail("is not a number", "mend the header", keyword);
  }
  return value;
}

std::optional<std::string> FitsInput::text(const std::string& keyword) const {
  int status = 0;
  std::array<char, FLEN_VALUE> value = {};
  fits_read_key(handle(file_), TSTRING, keyword.c_str(), value.data(), nullptr, &status);
  if (status != 0) {
    fits_clear_errmsg();
    return std::nullopt;
  }
  std::string found(value.data());
  found.erase(found.find_last_not_of(' ') + 1);
  return found;
}

double FitsInput::required_number(const std::string& keyword) const {
  const auto found = number(keyword);
  if (!found) fail("is missing from the header", "add the keyword", keyword);
  return *found;
}

std::string FitsInput::required_text(const std::string& keyword) const {
  const auto found = text(keyword);
  if (!found) fail("is missing from the header", "add the keyword", keyword);
  return *found;
}

std::vector<long> FitsInput::image_size() const {
  int status = 0;
  int dimensions = 0;
  fits_get_img_dim(handle(file_), &dimensions, &status);
  check(status, "reading its size");
  std::vector<long> size(static_cast<std::size_t>(dimensions));
  fits_get_img_size(handle(file_), dimensions, size.data(), &status);
  check(status, "reading its size");
  return size;
}

std::vector<float> FitsInput::image() const {
  std::size_t count = 1;
  const std::vector<long> size = image_size();
  for (const long n : size) count *= static_cast<std::size_t>(n);
  std::vector<float> pixels(count);
  std::vector<long> first(size.size(), 1);
  int status = 0;
  float null_value = blank;
  int any_blank = 0;  // CFITSIO writes to it unasked where it meets a NaN
  fits_read_pix(handle(file_), TFLOAT, first.data(), static_cast<LONGLONG>(count), &null_value, pixels.data(),
                &any_blank, &status);
  check(status, "reading its pixels");
  return pixels;
}

std::vector<float> FitsInput::column(const std::string& name) const {
  int status = 0;
  int index = 1;
  if (!name.empty()) {
    std::string pattern = name;
    fits_get_colnum(handle(file_), CASEINSEN, pattern.data(), &index, &status);
    if (status != 0) {
      fits_clear_errmsg();
      fail("has no such column", "name one of the table's columns", name);
    }
  }
  int type = 0;
  long repeat = 0;
  long width = 0;
  long rows = 0;
  fits_get_coltype(handle(file_), index, &type, &repeat, &width, &status);
  fits_get_num_rows(handle(file_), &rows, &status);
  check(status, "reading its columns");
  std::vector<float> values(static_cast<std::size_t>(repeat) * static_cast<std::size_t>(rows));
  float null_value = blank;
  int any_blank = 0;  // CFITSIO writes to it unasked where it meets a NaN
  fits_read_col(handle(file_), TFLOAT, index, 1, 1, static_cast<LONGLONG>(values.size()), &null_value, values.data(),
                &any_blank, &status);
  check(status, "reading its values");
  return values;
}

}  // namespace thirdrung
