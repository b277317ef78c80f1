// protocol/wording/cautions.cpp -- what a number does not say.
#include "protocol/wording/cautions.hpp"

namespace countsel {

void add_cautions(Answer& answer) {
  answer.notes.push_back({"caution",
                          "A calculation aid: it describes the numbers given and shows neither cause, "
                          "compliance nor safety. Limits cover "
                          "chance alone, not missed reports, changed definitions or events that come in "
                          "clusters. Local codes and "
                          "licensed practice decide."});
}

}  // namespace countsel
