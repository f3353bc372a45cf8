#include "base/text.h"

#include <fmt/format.h>
#include <openssl/evp.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstring>
#include <fstream>
#include <limits>
#include <numeric>
#include <sstream>
#include <vector>

#include "base/error.h"

namespace thirdrung {

namespace {

/// Length of the valid UTF-8 sequence at the front of `text`, or 0 if it is not one (RFC 3629, section 4).
std::size_t utf8_sequence(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char first = byte(0);
  if (first < 0x80) return 1;
  const std::size_t length = first >= 0xC2 && first <= 0xDF   ? 2
                             : first >= 0xE0 && first <= 0xEF ? 3
                             : first >= 0xF0 && first <= 0xF4 ? 4
                                                              : 0;
  if (length == 0 || text.size() < length) return 0;
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte(i) & 0xC0) != 0x80) return 0;
  }
  if ((first == 0xE0 && byte(1) < 0xA0) || (first == 0xED && byte(1) > 0x9F) || (first == 0xF0 && byte(1) < 0x90) ||
      (first == 0xF4 && byte(1) > 0x8F)) {
    return 0;
  }
  return length;
}

std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t above = row[j];
      row[j] = std::min({above + 1, row[j - 1] + 1, diagonal + (a[i - 1] == b[j - 1] ? 0U : 1U)});
      diagonal = above;
    }
  }
  return row.back();
}

}  // namespace

std::string read_file(const std::filesystem::path& path) {
  std::error_code error;
  if (!std::filesystem::exists(path, error)) {
    throw InputError({path.string(), {}, {}}, "no such file",
                     "check the name, and the folder that names are relative to");
  }
  if (std::filesystem::is_directory(path, error)) {
    throw InputError({path.string(), {}, {}}, "is a folder, not a file", "name a file");
  }
  std::ifstream in(path, std::ios::binary);
  if (!in)
    throw InputError({path.string(), {}, {}}, fmt::format("cannot be opened ({})", std::strerror(errno)),
                     "check its permissions");
  std::ostringstream content;
  content << in.rdbuf();
  return std::move(content).str();
}

std::string read_text_file(const std::filesystem::path& path) {
  std::string content = read_file(path);
  std::size_t line = 1;
  for (std::size_t i = 0; i < content.size();) {
    const std::size_t length = utf8_sequence(std::string_view(content).substr(i));
    if (length == 0) {
      throw InputError({path.string(), {}, {}}, fmt::format("line {} is not UTF-8 text", line),
                       "save the file as UTF-8");
    }
    if (content[i] == '\n') ++line;
    i += length;
  }
  return content;
}

std::string nearest_word(std::string_view word, std::span<const std::string> candidates) {
  std::string best;
  std::size_t best_distance = std::numeric_limits<std::size_t>::max();
  for (const std::string& candidate : candidates) {
    const std::size_t distance = edit_distance(word, candidate);
    if (distance < best_distance) {
      best_distance = distance;
      best = candidate;
    }
  }
  return 2 * best_distance <= std::max(word.size(), best.size()) ? best : std::string();
}

std::string sha256_of_text(std::string_view text) {
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned int length = 0;
  if (EVP_Digest(text.data(), text.size(), digest.data(), &length, EVP_sha256(), nullptr) != 1) {
    throw std::runtime_error("SHA-256 is not available in this OpenSSL.");
  }
  std::string hex;
  for (unsigned int i = 0; i < length; ++i) hex += fmt::format("{:02x}", digest[i]);
  return hex;
}

std::string sha256_of_file(const std::filesystem::path& path) {
  return sha256_of_text(read_file(path));
}

}  // namespace thirdrung
