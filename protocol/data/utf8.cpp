// protocol/data/utf8.cpp -- the byte ranges of RFC 3629, section 4.
#include "protocol/data/utf8.hpp"

#include <cstddef>

namespace countsel {

bool valid_utf8(std::string_view text) {
  for (std::size_t i = 0; i < text.size();) {
    const auto lead = static_cast<unsigned char>(text[i]);
    if (lead == 0) return false;
    if (lead < 0x80) {
      ++i;
      continue;
    }
    const std::size_t more = lead >= 0xF0 ? 3 : lead >= 0xE0 ? 2 : 1;
    if (lead < 0xC2 || lead > 0xF4 || i + more >= text.size()) return false;
    for (std::size_t j = 1; j <= more; ++j) {
      if ((static_cast<unsigned char>(text[i + j]) & 0xC0U) != 0x80U) return false;
    }
    const auto second = static_cast<unsigned char>(text[i + 1]);
    if ((lead == 0xE0 && second < 0xA0) || (lead == 0xED && second > 0x9F) ||
        (lead == 0xF0 && second < 0x90) || (lead == 0xF4 && second > 0x8F)) {
      return false;
    }
    i += more + 1;
  }
  return true;
}

}  // namespace countsel
