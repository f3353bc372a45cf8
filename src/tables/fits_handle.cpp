#include "tables/fits_handle.h"

#include <fmt/format.h>

#include <array>
#include <cstdlib>
#include <utility>

#include "base/error.h"
#include "tables/gzip.h"

namespace thirdrung {

namespace {

constexpr std::size_t kBlock = 2880;

std::string reason(int status) {
  std::array<char, FLEN_STATUS> text{};
  fits_get_errstatus(status, text.data());
  fits_clear_errmsg();
  return text.data();
}

}  // namespace

bool looks_like_fits(std::string_view content) {
  return content.starts_with("SIMPLE  =");
}

FitsHandle::FitsHandle() : is_new_(true) {
  size_ = kBlock;
  buffer_ = std::malloc(size_);
  int status = 0;
  fits_create_memfile(&fits_, &buffer_, &size_, 100 * kBlock, std::realloc, &status);
  fits_create_img(fits_, BYTE_IMG, 0, nullptr, &status);
  check(status);
}

FitsHandle::FitsHandle(std::string content, std::string file) : file_(std::move(file)), is_new_(false) {
  content_ = looks_like_gzip(content) ? gunzip(content, file_) : std::move(content);
  if (!looks_like_fits(content_)) {
    throw InputError({file_, {}, {}}, "is not a FITS file", "give a FITS file, or name the table by its own kind");
  }
  buffer_ = content_.data();
  size_ = content_.size();
  int status = 0;
  fits_open_memfile(&fits_, "memory", READONLY, &buffer_, &size_, 0, nullptr, &status);
  check(status);
  try {
    verify();
  } catch (...) {
    status = 0;
    fits_close_file(fits_, &status);
    throw;
  }
}

FitsHandle::~FitsHandle() {
  int status = 0;
  if (fits_ != nullptr) fits_close_file(fits_, &status);
  fits_clear_errmsg();
  if (is_new_) std::free(buffer_);
}

void FitsHandle::check(int status) const {
  if (status == 0) return;
  if (is_new_) throw OutputError(fmt::format("A FITS file cannot be put together: {}.", reason(status)));
  throw InputError({file_, {}, {}}, fmt::format("is not a sound FITS file ({})", reason(status)),
                   "fetch or write it again");
}

int FitsHandle::hdus() const {
  int count = 0;
  int status = 0;
  // A header that is being written has no end yet, and CFITSIO then counts no HDU at all.
  if (is_new_) fits_flush_file(fits_, &status);
  fits_get_num_hdus(fits_, &count, &status);
  check(status);
  return count;
}

void FitsHandle::move_to(int hdu) const {
  int status = 0;
  fits_movabs_hdu(fits_, hdu, nullptr, &status);
  check(status);
}

std::string FitsHandle::name() const {
  std::array<char, FLEN_VALUE> text{};
  int status = 0;
  fits_read_key(fits_, TSTRING, "EXTNAME", text.data(), nullptr, &status);
  fits_clear_errmsg();
  return status == 0 ? text.data() : "";
}

void FitsHandle::verify() const {
  const int count = hdus();
  for (int hdu = 1; hdu <= count; ++hdu) {
    move_to(hdu);
    LONGLONG end = 0;
    int status = 0;
    fits_get_hduaddrll(fits_, nullptr, nullptr, &end, &status);
    check(status);
    if (end > static_cast<LONGLONG>(size_)) {
      throw InputError({file_, {}, {}},
                       fmt::format("is cut short: part {} ends at byte {}, the file at byte {}", hdu, end, size_),
                       "fetch or write it again");
    }
    int data_is_right = 0;
    int all_is_right = 0;
    fits_verify_chksum(fits_, &data_is_right, &all_is_right, &status);
    check(status);
    if (data_is_right < 0 || all_is_right < 0) {
      throw InputError({file_, {}, {}}, fmt::format("part {} differs from the checksum written with it", hdu),
                       "fetch or write it again; it was damaged or changed since");
    }
  }
  // Bytes behind the last HDU that CFITSIO can read, other than padding, are one that it cannot.
  LONGLONG end = 0;
  int status = 0;
  fits_get_hduaddrll(fits_, nullptr, nullptr, &end, &status);
  check(status);
  const std::string_view rest = std::string_view(content_).substr(static_cast<std::size_t>(end));
  if (rest.find_first_not_of('\0') != std::string_view::npos) {
    throw InputError({file_, {}, {}}, fmt::format("part {} is cut short or damaged", count + 1),
                     "fetch or write it again");
  }
  move_to(1);
}

/// As fits_write_chksum (checksum convention of the FITS standard 4.0, appendix J), without the date that that writes
/// into the comments: equal contents are to give equal bytes.
void FitsHandle::add_checksums() const {
  const int count = hdus();
  for (int hdu = 1; hdu <= count; ++hdu) {
    move_to(hdu);
    const char* zeros = "0000000000000000";
    unsigned long data = 0;
    unsigned long whole = 0;
    int status = 0;
    fits_update_key_str(fits_, "CHECKSUM", zeros, "HDU checksum", &status);
    fits_update_key_str(fits_, "DATASUM", "0", "data unit checksum", &status);
    fits_flush_file(fits_, &status);  // writes the END card, which counts
    fits_get_chksum(fits_, &data, &whole, &status);
    fits_update_key_str(fits_, "DATASUM", fmt::format("{}", data).c_str(), nullptr, &status);
    fits_flush_file(fits_, &status);
    fits_get_chksum(fits_, &data, &whole, &status);
    check(status);
    std::array<char, FLEN_VALUE> code{};
    fits_encode_chksum(whole, 1, code.data());
    fits_update_key_str(fits_, "CHECKSUM", code.data(), nullptr, &status);
    check(status);
  }
}

std::string FitsHandle::finish() {
  add_checksums();
  int status = 0;
  fits_flush_file(fits_, &status);
  check(status);
  move_to(hdus());
  LONGLONG end = 0;
  fits_get_hduaddrll(fits_, nullptr, nullptr, &end, &status);
  check(status);
  return {static_cast<const char*>(buffer_), static_cast<std::size_t>(end)};
}

}  // namespace thirdrung
