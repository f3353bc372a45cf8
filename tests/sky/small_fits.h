#pragma once

#include <bit>
#include <cstdint>
#include <filesystem>
#include <fstream>
#include <initializer_list>
#include <string>
#include <utility>
#include <vector>

namespace thirdrung::testing {

/// Keyword and value as it stands in a FITS card ("'km/s'" with its quotes, or "1.5").
using Card = std::pair<std::string, std::string>;

inline void add_card(std::string& header, const std::string& keyword, const std::string& value) {
  std::string card = keyword;
  card.resize(8, ' ');
  card += "= " + value;
  card.resize(80, ' ');
  header += card;
}

/// A FITS image of 32-bit floats written byte by byte (FITS standard 4.0), so that no library reads what it wrote
/// itself.
inline void write_small_fits(const std::filesystem::path& path, const std::vector<int>& size,
                             const std::vector<float>& pixels, const std::vector<Card>& cards) {
  std::string header;
  add_card(header, "SIMPLE", "T");
  add_card(header, "BITPIX", "-32");
  add_card(header, "NAXIS", std::to_string(size.size()));
  for (std::size_t i = 0; i < size.size(); ++i)
    add_card(header, "NAXIS" + std::to_string(i + 1), std::to_string(size[i]));
  for (const auto& [keyword, value] : cards) add_card(header, keyword, value);
  std::string end = "END";
  end.resize(80, ' ');
  header += end;
  header.resize((header.size() + 2879) / 2880 * 2880, ' ');
  std::string data;
  for (const float pixel : pixels) {
    const auto bits = std::bit_cast<std::uint32_t>(pixel);
    for (int shift = 24; shift >= 0; shift -= 8) data += static_cast<char>((bits >> shift) & 0xFFU);
  }
  data.resize((data.size() + 2879) / 2880 * 2880, '\0');
  std::ofstream(path, std::ios::binary) << header << data;
}

/// A fresh folder that removes itself.
class ScratchFolder {
 public:
  explicit ScratchFolder(const std::string& name) : path_(std::filesystem::temp_directory_path() / name) {
    std::filesystem::remove_all(path_);
    std::filesystem::create_directories(path_);
  }
  ~ScratchFolder() { std::filesystem::remove_all(path_); }
  ScratchFolder(const ScratchFolder&) = delete;
  ScratchFolder& operator=(const ScratchFolder&) = delete;
  std::filesystem::path operator/(const std::string& file) const { return path_ / file; }

 private:
  std::filesystem::path path_;
};

}  // namespace thirdrung::testing
