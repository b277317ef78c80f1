// protocol/wire/base64.cpp -- four characters to three bytes, by table.
#include "protocol/wire/base64.hpp"

#include <array>
#include <bit>
#include <cstdint>
#include <cstring>

namespace countsel {
namespace {

static_assert(std::endian::native == std::endian::little, "doubles are packed little-endian");

constexpr std::array<std::uint8_t, 256> values = [] {
  std::array<std::uint8_t, 256> table{};
  table.fill(0xFF);
  constexpr std::string_view alphabet = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
  for (std::size_t i = 0; i < alphabet.size(); ++i) {
    table[static_cast<unsigned char>(alphabet[i])] = static_cast<std::uint8_t>(i);
  }
  return table;
}();

}  // namespace

std::optional<std::vector<double>> unpack_doubles(std::string_view text) {
  if (text.size() % 4 != 0) return std::nullopt;
  std::size_t padding = 0;
  while (padding < 2 && padding < text.size() && text[text.size() - 1 - padding] == '=') ++padding;
  const std::size_t bytes = text.size() / 4 * 3 - padding;
  if (bytes % sizeof(double) != 0) return std::nullopt;
  std::vector<double> doubles(bytes / sizeof(double));
  auto* out = reinterpret_cast<unsigned char*>(doubles.data());
  const std::size_t whole = (text.size() - (padding ? 4 : 0)) / 4;
  std::uint32_t bad = 0;
  for (std::size_t i = 0; i < whole; ++i) {
    std::uint32_t word = 0;
    for (std::size_t j = 0; j < 4; ++j) {
      const auto value = values[static_cast<unsigned char>(text[4 * i + j])];
      bad |= value & 0x80U;
      word = word << 6 | (value & 0x3FU);
    }
    *out++ = static_cast<unsigned char>(word >> 16);
    *out++ = static_cast<unsigned char>(word >> 8);
    *out++ = static_cast<unsigned char>(word);
  }
  if (padding) {
    std::uint32_t word = 0;
    for (std::size_t j = 0; j < 4; ++j) {
      const char c = text[4 * whole + j];
      const bool pad = j + padding >= 4;
      const auto value = pad ? std::uint8_t{0} : values[static_cast<unsigned char>(c)];
      bad |= value & 0x80U;
      word = word << 6 | (value & 0x3FU);
    }
    *out++ = static_cast<unsigned char>(word >> 16);
    if (padding == 1) *out++ = static_cast<unsigned char>(word >> 8);
  }
  if (bad) return std::nullopt;
  return doubles;
}

}  // namespace countsel
