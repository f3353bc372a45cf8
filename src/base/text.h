#pragma once

#include <filesystem>
#include <span>
#include <string>
#include <string_view>

namespace thirdrung {

/// Whole content of a file. Throws InputError if it is missing or cannot be read.
std::string read_file(const std::filesystem::path& path);

/// As read_file, but throws InputError naming the line if the content is not valid UTF-8.
std::string read_text_file(const std::filesystem::path& path);

/// The candidate with the smallest edit distance to `word`, or "" if none is near (more than half its letters differ).
std::string nearest_word(std::string_view word, std::span<const std::string> candidates);

/// SHA-256 of a file, in hexadecimal. Throws InputError if it cannot be read.
std::string sha256_of_file(const std::filesystem::path& path);
/// SHA-256 of a text, in hexadecimal.
std::string sha256_of_text(std::string_view text);

}  // namespace thirdrung
