#include "tables/gzip.h"

#include <zlib.h>

#include <algorithm>
#include <array>
#include <limits>
#include <stdexcept>

#include "base/error.h"

namespace thirdrung {

namespace {

constexpr int kGzipWindow = 15 + 16;  // largest window, gzip wrapping (zlib.h)
constexpr std::size_t kLargestPiece = std::numeric_limits<uInt>::max();

/// Runs `step` (inflate or deflate) until it has nothing more to write; returns its last status.
template <typename Step>
int pump(z_stream& stream, std::string& output, const Step& step) {
  std::array<char, 1 << 16> piece{};
  int status = Z_OK;
  do {
    stream.next_out = reinterpret_cast<Bytef*>(piece.data());
    stream.avail_out = static_cast<uInt>(piece.size());
    status = step();
    output.append(piece.data(), piece.size() - stream.avail_out);
  } while (status == Z_OK && (stream.avail_in > 0 || stream.avail_out == 0));
  return status;
}

/// zlib wants a pointer to bytes it will not change.
Bytef* input_of(std::string_view content) {
  return reinterpret_cast<Bytef*>(const_cast<char*>(content.data()));
}

}  // namespace

bool looks_like_gzip(std::string_view content) {
  return content.starts_with("\x1f\x8b");
}

std::string gunzip(std::string_view content, const std::string& file) {
  std::string output;
  // A gzip file is one or more members, each with its own ending.
  while (looks_like_gzip(content)) {
    z_stream stream{};
    if (inflateInit2(&stream, kGzipWindow) != Z_OK) throw std::runtime_error("zlib cannot be started.");
    stream.next_in = input_of(content);
    const std::size_t given = std::min(content.size(), kLargestPiece);
    stream.avail_in = static_cast<uInt>(given);
    const int status = pump(stream, output, [&] { return inflate(&stream, Z_NO_FLUSH); });
    const std::size_t used = given - stream.avail_in;
    inflateEnd(&stream);
    if (status == Z_OK || status == Z_BUF_ERROR) {
      throw InputError({file, {}, {}}, "the compressed file ends too early", "fetch or write it again");
    }
    if (status != Z_STREAM_END) {
      throw InputError({file, {}, {}}, "the compressed file is damaged", "fetch or write it again");
    }
    content.remove_prefix(used);
  }
  return output;
}

std::string gzip(std::string_view content) {
  if (content.size() > kLargestPiece) throw OutputError("A file of more than 4 GB cannot be compressed here.");
  z_stream stream{};
  if (deflateInit2(&stream, Z_DEFAULT_COMPRESSION, Z_DEFLATED, kGzipWindow, 8, Z_DEFAULT_STRATEGY) != Z_OK) {
    throw std::runtime_error("zlib cannot be started.");
  }
  stream.next_in = input_of(content);
  stream.avail_in = static_cast<uInt>(content.size());
  std::string output;
  const int status = pump(stream, output, [&] { return deflate(&stream, Z_FINISH); });
  deflateEnd(&stream);
  if (status != Z_STREAM_END) throw std::runtime_error("zlib could not compress.");
  return output;
}

}  // namespace thirdrung
