// protocol/wire/json_writer.cpp -- numbers by std::to_chars, strings escaped as RFC 8259 asks.
#include "protocol/wire/json_writer.hpp"

#include <charconv>
#include <cmath>

namespace countsel {

JsonWriter& JsonWriter::number(double value) {
  if (std::isnan(value)) return raw("null");
  if (std::isinf(value)) return raw(value > 0 ? "\"inf\"" : "\"-inf\"");
  separate();
  char buffer[32];
  const auto end = std::abs(value) < 9007199254740992.0 && value == std::trunc(value)
                       ? std::to_chars(buffer, buffer + sizeof buffer, static_cast<long long>(value))
                       : std::to_chars(buffer, buffer + sizeof buffer, value);
  out_.append(buffer, end.ptr);
  return *this;
}

JsonWriter& JsonWriter::text(std::string_view text) {
  separate();
  out_ += '"';
  static constexpr char hex[] = "0123456789abcdef";
  std::size_t from = 0;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const auto c = static_cast<unsigned char>(text[i]);
    if (c >= 0x20 && c != '"' && c != '\\') continue;
    out_.append(text, from, i - from);
    from = i + 1;
    switch (c) {
      case '"':
        out_ += "\\\"";
        break;
      case '\\':
        out_ += "\\\\";
        break;
      case '\n':
        out_ += "\\n";
        break;
      case '\t':
        out_ += "\\t";
        break;
      case '\r':
        out_ += "\\r";
        break;
      default:
        out_ += "\\u00";
        out_ += hex[c >> 4];
        out_ += hex[c & 15];
    }
  }
  out_.append(text, from);
  out_ += '"';
  return *this;
}

JsonWriter& JsonWriter::numbers(const std::vector<double>& values) {
  open('[');
  for (const double value : values) number(value);
  return close(']');
}

JsonWriter& JsonWriter::texts(const std::vector<std::string>& values) {
  open('[');
  for (const auto& value : values) text(value);
  return close(']');
}

}  // namespace countsel
