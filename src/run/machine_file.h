// Machine files: a compiled grammar with the text of all that it was made from.
//
// `compile velmari.tier -o velmari.machine` writes one; every verb takes it in place of the grammar. It is told by its
// first bytes. The sources in it (grammar, includes, tables, the library's tables) are parsed and checked again, the machines are read:
// nothing is compiled, and nothing outside the file is asked. The same grammar makes the same bytes.
//
// The file: 32 bytes (magic, format, length and checksum of what follows, layout, checksum of these), then the sources,
// the rules that were left out, what the compiler warned of, and the cascade. The *layout* is a checksum of how the checked grammar
// numbers nodes, symbols and rules, and of the kinds of messages: where a build numbers them otherwise, the machines would mean something else.
// Tested by tests/unit/run/machine_file_test.cc (damage at every place) and tests/cli/machine.sh.
#pragma once

#include <cstdint>
#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "compile/cascade.h"
#include "model/grammar.h"

namespace tiersmith {

// Raised with every change of what is written, or of what machines mean: files of other formats are refused.
inline constexpr std::uint32_t kMachineFormat = 1;

// A grammar, and its machines once there are any.
struct CompiledGrammar {
  std::unique_ptr<Grammar> grammar;
  std::unique_ptr<Cascade> cascade;
  std::vector<std::string> left_out;  // rules of the file that the grammar does without (LeaveOutRule)
  Diagnostics warnings;               // of Compile
};

// Reads a grammar from a .tier file (no cascade then), or from a machine file. Null grammar after an error.
CompiledGrammar OpenGrammar(const std::string& path, const std::shared_ptr<SourceMap>& sources,
                            Diagnostics& diagnostics);

// Requires: the grammar was read by OpenGrammar (its sources are parts) and has its cascade.
std::string WriteMachine(const CompiledGrammar& compiled);

// A checksum of how grammar and build number what machines and their warnings refer to.
std::uint32_t LayoutOf(const Grammar& grammar);
// `body` with the 32 bytes before it.
std::string WithHeader(std::string_view body, std::uint32_t format, std::uint32_t layout);

}  // namespace tiersmith
