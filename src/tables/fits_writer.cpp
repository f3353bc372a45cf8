#include <fmt/format.h>

#include <algorithm>
#include <cctype>
#include <numeric>
#include <set>
#include <stdexcept>

#include "base/atomic_file.h"
#include "tables/fits_handle.h"
#include "tables/fits_image.h"
#include "tables/fits_table.h"
#include "tables/gzip.h"

namespace thirdrung {

struct FitsWriter::State {
  FitsHandle fits;
  std::set<std::string> names;

  void claim(const std::string& name) {
    std::string upper = name;
    std::transform(upper.begin(), upper.end(), upper.begin(),
                   [](unsigned char c) { return static_cast<char>(std::toupper(c)); });
    if (!names.insert(upper).second) throw std::logic_error(fmt::format("the file has a part \"{}\" already", name));
    fits.move_to(fits.hdus());
  }
};

FitsWriter::FitsWriter() : state_(std::make_unique<State>()) {}
FitsWriter::~FitsWriter() = default;
FitsWriter::FitsWriter(FitsWriter&&) noexcept = default;
FitsWriter& FitsWriter::operator=(FitsWriter&&) noexcept = default;

FitsWriter& FitsWriter::add_keyword(const FitsKeyword& keyword) {
  state_->fits.move_to(1);
  write_keyword(state_->fits, keyword);
  return *this;
}

FitsWriter& FitsWriter::add_keywords(const FitsKeywords& keywords) {
  for (const FitsKeyword& keyword : keywords) add_keyword(keyword);
  return *this;
}

FitsWriter& FitsWriter::add_image(const std::string& name, const std::vector<std::size_t>& shape,
                                  std::span<const double> values, const std::string& unit, const std::string& comment,
                                  bool as_float, const FitsKeywords& keywords) {
  const std::size_t size = std::accumulate(shape.begin(), shape.end(), std::size_t{1}, std::multiplies<>());
  if (shape.empty() || size != values.size()) {
    throw std::logic_error(fmt::format("array \"{}\" has {} values, its shape asks for {}", name, values.size(), size));
  }
  state_->claim(name);
  const FitsHandle& fits = state_->fits;
  std::vector<LONGLONG> axes(shape.rbegin(), shape.rend());
  int status = 0;
  fits_create_imgll(fits.get(), as_float ? FLOAT_IMG : DOUBLE_IMG, static_cast<int>(axes.size()), axes.data(), &status);
  fits_write_key_str(fits.get(), "EXTNAME", name.c_str(), ascii_escaped(comment).c_str(), &status);
  if (!unit.empty())
    fits_write_key_str(fits.get(), "BUNIT", ascii_escaped(unit).c_str(), "unit of the values", &status);
  if (size > 0) {
    // CFITSIO takes the values through a pointer that it does not write to.
    fits_write_img(fits.get(), TDOUBLE, 1, static_cast<LONGLONG>(size), const_cast<double*>(values.data()), &status);
  }
  fits.check(status);
  for (const FitsKeyword& keyword : keywords) write_keyword(fits, keyword);
  return *this;
}

FitsWriter& FitsWriter::add_table(const Table& table, const std::string& name, const FitsKeywords& keywords) {
  state_->claim(name);
  append_fits_table(state_->fits, table, name, keywords);
  return *this;
}

void FitsWriter::write(const std::filesystem::path& path) {
  const std::string content = state_->fits.finish();
  write_file_atomically(path, path.extension() == ".gz" ? gzip(content) : content);
}

}  // namespace thirdrung
