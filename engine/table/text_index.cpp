// engine/table/text_index.cpp -- linear probing, at most half full.
#include "engine/table/text_index.hpp"

#define XXH_INLINE_ALL
#include <xxhash.h>

namespace countsel {
namespace {

std::size_t first_slot(std::string_view text, std::size_t slots) {
  return static_cast<std::size_t>(XXH3_64bits(text.data(), text.size())) & (slots - 1);
}

}  // namespace

void TextIndex::grow(const std::vector<std::string>& texts) {
  const std::size_t size = slots_.empty() ? 16 : 2 * slots_.size();
  slots_.assign(size, -1);
  for (std::size_t i = 0; i < texts.size(); ++i) {
    auto slot = first_slot(texts[i], size);
    while (slots_[slot] >= 0) slot = (slot + 1) & (size - 1);
    slots_[slot] = static_cast<std::int32_t>(i);
  }
}

std::int32_t TextIndex::find_or_add(std::string_view text, std::vector<std::string>& texts) {
  if (last_ >= 0 && texts[static_cast<std::size_t>(last_)] == text) return last_;
  if (2 * texts.size() >= slots_.size()) grow(texts);
  auto slot = first_slot(text, slots_.size());
  while (slots_[slot] >= 0) {
    if (texts[static_cast<std::size_t>(slots_[slot])] == text) return last_ = slots_[slot];
    slot = (slot + 1) & (slots_.size() - 1);
  }
  last_ = static_cast<std::int32_t>(texts.size());
  slots_[slot] = last_;
  texts.emplace_back(text);
  return last_;
}

}  // namespace countsel
