// protocol/wire/key_guard.hpp -- no key twice in one object, and not too many altogether.
//
// RFC 8259 leaves open what a repeated key means; here it is refused. Parsers that keep the first and
// parsers that keep the last would read two different requests.
#pragma once

#include <functional>
#include <set>
#include <string>
#include <vector>

#include "protocol/wire/limits.hpp"

namespace countsel {

class KeyGuard {
 public:
  enum class Verdict { fresh, twice, too_many };

  void open() { seen_.emplace_back(); }
  void close() { seen_.pop_back(); }
  Verdict key(const std::string& name) {
    if (++keys_ > limits::most_keys) return Verdict::too_many;
    return seen_.back().insert(name).second ? Verdict::fresh : Verdict::twice;
  }

 private:
  std::vector<std::set<std::string, std::less<>>> seen_;
  std::size_t keys_ = 0;
};

}  // namespace countsel
