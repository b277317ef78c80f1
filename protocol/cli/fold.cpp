// protocol/cli/fold.cpp -- folding at spaces.
#include "protocol/cli/fold.hpp"

#include <algorithm>

namespace countsel {

std::size_t seen_width(const std::string& text) {
  return static_cast<std::size_t>(std::count_if(
      text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0U) != 0x80U; }));
}

std::string folded(const std::string& text, std::size_t indent) {
  constexpr std::size_t width = 96;
  std::string out;
  std::size_t column = indent;
  for (std::size_t from = 0; from < text.size();) {
    const auto space = std::min(text.find(' ', from), text.size());
    const std::string word = text.substr(from, space - from);
    if (column > indent && column + 1 + seen_width(word) > width) {
      out += '\n';
      out.append(indent, ' ');
      column = indent;
    } else if (column > indent) {
      out += ' ';
      ++column;
    }
    out += word;
    column += seen_width(word);
    from = space + 1;
  }
  return out;
}

}  // namespace countsel
