// protocol/wire/brief.cpp -- cutting between characters, never inside one.
#include "protocol/wire/brief.hpp"

#include <nlohmann/json.hpp>

namespace countsel {

std::string brief(std::string_view text) {
  constexpr std::size_t most_bytes = 60;
  if (text.size() <= most_bytes) return std::string(text);
  std::size_t end = most_bytes;
  while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xC0U) == 0x80U) --end;
  return std::string(text.substr(0, end)) + "…";
}

std::string brief_json(const Json& value) {
  // A long text is cut before it is quoted, so that the quotes stay a pair.
  if (value.is_string()) return Json(brief(value.get_ref<const std::string&>())).dump();
  return brief(value.dump());
}

}  // namespace countsel
