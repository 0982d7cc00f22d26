// Unicode names of characters, for messages. Tested by tests/unit/model/text_test.cc.
#pragma once

#include <string>

namespace tiersmith {

// "LATIN SMALL LETTER ENG"; for characters outside the blocks used in transcription, the general category
// ("other letter").
std::string CharacterName(char32_t code);

}  // namespace tiersmith
