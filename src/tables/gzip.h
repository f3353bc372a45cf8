#pragma once

#include <string>
#include <string_view>

namespace thirdrung {

/// True if the content opens with the mark of gzip (RFC 1952).
bool looks_like_gzip(std::string_view content);

/// Content of a gzip file. @param file name for errors. Throws InputError if it is cut short or damaged.
std::string gunzip(std::string_view content, const std::string& file);

/// The content as a gzip file, without date or name, so that equal contents give equal bytes.
std::string gzip(std::string_view content);

}  // namespace thirdrung
