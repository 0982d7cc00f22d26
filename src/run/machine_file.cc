#include "run/machine_file.h"

#include <fmt/format.h>
#include <zlib.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <optional>
#include <type_traits>
#include <utility>

#include "base/bytes.h"
#include "base/utf8.h"
#include "compile/cascade_data.h"

namespace tiersmith {
namespace {

constexpr std::string_view kMagic("\x89TIERSM\0", 8);  // neither UTF-8 nor printable
constexpr std::size_t kHeaderSize = 32;
constexpr int kDeepest = 64;  // of a letter's parts
constexpr Span kNowhere{kNoFile, 0, 0};

std::uint32_t Checksum(std::string_view bytes) {
  return static_cast<std::uint32_t>(
      crc32_z(0, reinterpret_cast<const unsigned char*>(bytes.data()), bytes.size()));  // NOLINT
}

// ---- what is in a file ------------------------------------------------------------------------------------
struct Source {
  std::string name;
  std::string text;
};

// What stands before the cascade: all that can be read without knowing the grammar.
struct Preface {
  std::vector<Source> sources;  // the grammar first
  std::vector<std::string> left_out;
  std::vector<Diagnostic> warnings;
};

// The fields of everything that is written, in order: one list for writing and reading. Each value is taken apart into
// names for all its members, so that a member added elsewhere does not compile before it is listed here.
template <class File>
class Fields {
 public:
  template <class T>
  using Of = std::conditional_t<File::kWrites, const T, T>;

  explicit Fields(File& file) : file_(file) {}

  void One(Of<Preface>& preface) {
    auto& [sources, left_out, warnings] = preface;
    List(sources);
    List(left_out);
    List(warnings);
  }
  void One(Of<LetterClasses::Contents>& contents) {
    auto& [visible, literals, rests, classes] = contents;
    List(visible);
    List(literals);
    List(rests);
    List(classes);
  }
  void One(Of<InputLetter>& input) {
    auto& [parts, symbol, boundary, tags, linked] = input;
    One(parts);
    file_.Number(symbol);
    file_.Number(boundary);
    file_.Long(tags);
    file_.Number(linked);
  }
  // Not how long it took to make: the same grammar makes the same bytes.
  void One(Of<Segment>& segment) {
    auto& [rules, machine, classes, letters, seconds, exact] = segment;
    List(rules);
    One(machine);
    file_.Number(classes);
    file_.Number(letters);
    file_.Number(exact);
  }
  template <class T>
  void List(T& list) {
    std::size_t size = list.size();
    file_.Size(size);
    if constexpr (!File::kWrites) list.resize(size);
    for (auto& item : list) One(item);
  }

 private:
  void One(Of<int>& number) { file_.Number(number); }
  void One(Of<char>& number) { file_.Number(number); }
  void One(Of<NodeId>& number) { file_.Number(number); }
  void One(Of<std::string>& text) { file_.Text(text); }
  void One(Of<Source>& source) {
    auto& [name, text] = source;
    file_.Text(name);
    file_.Text(text);
  }
  void One(Of<Span>& span) {
    auto& [file, begin, end] = span;
    file_.Number(file);
    file_.Number(begin);
    file_.Number(end);
  }
  void One(Of<std::pair<Span, std::string>>& note) {
    auto& [span, text] = note;
    One(span);
    file_.Text(text);
  }
  void One(Of<Diagnostic>& warning) {
    auto& [kind, severity, span, message, remedy, also] = warning;
    file_.Number(kind);
    file_.Number(severity);
    One(span);
    file_.Text(message);
    file_.Text(remedy);
    List(also);
  }
  void One(Of<LetterPart>& part) {
    auto& [node, value, links, daughters] = part;
    file_.Require(++depth_ < kDeepest);
    file_.Number(node);
    file_.Number(value);
    file_.Number(links);
    List(daughters);
    --depth_;
  }
  void One(Of<Letter>& letter) {
    auto& [kind, boundary, tags, part] = letter;
    file_.Number(kind);
    file_.Number(boundary);
    file_.Long(tags);
    One(part);
  }
  void One(Of<ClassLetter>& letter) {
    auto& [visible, rest] = letter;
    One(visible);
    file_.Number(rest);
  }
  void One(Of<LetterClasses::Parts>& parts) {
    auto& [class_id, rest] = parts;
    file_.Number(class_id);
    file_.Number(rest);
  }
  void One(Of<TapeArc>& arc) {
    auto& [in, out, next, weight] = arc;
    file_.Number(in);
    file_.Number(out);
    file_.Number(next);
    file_.Real(weight);
  }
  void One(Of<std::vector<TapeArc>>& arcs) { List(arcs); }
  void One(Of<Tape>& tape) {
    auto& [arcs, starts, ends, symbols] = tape;
    List(arcs);
    List(starts);
    List(ends);
    One(symbols);
  }
  void One(Of<KeyPool>& pool) {
    std::size_t size = static_cast<std::size_t>(pool.size());
    file_.Size(size);
    for (std::size_t i = 0; i < size; ++i) {
      if constexpr (File::kWrites) {
        List(pool[static_cast<int>(i)]);
      } else {
        Key key;
        List(key);
        file_.Require(pool.Intern(key) == static_cast<int>(i));
      }
    }
  }

  File& file_;
  int depth_ = 0;
};

// ---- does it make sense -------------------------------------------------------------------------------------
// Every number in a cascade means something there: nothing that runs it looks past an end.
class Soundness {
 public:
  Soundness(const Grammar& grammar, const LetterClasses::Contents& classes) : grammar_(grammar), classes_(classes) {}

  bool Classes() const {
    const auto all = [](const auto& list, auto sound) { return std::all_of(list.begin(), list.end(), sound); };
    return all(classes_.visible, [&](NodeId node) { return node < grammar_.tree.nodes.size(); }) &&
           all(classes_.literals, [&](int literal) { return Below(literal, grammar_.inventory.literals.size()); }) &&
           all(classes_.rests, [&](const LetterPart& rest) { return Part(rest); }) &&
           all(classes_.classes, [&](const ClassLetter& letter) {
             return Kind(letter.visible) && Part(letter.visible.part) && (letter.rest == -1 || Rest(letter.rest));
           });
  }
  bool Input(const InputLetter& input) const {
    return Class(input.parts.class_id) && Rest(input.parts.rest) && Known(input.boundary) &&
           (input.symbol == -1 || Below(input.symbol, grammar_.inventory.symbols.size()));
  }
  bool OneSegment(const Segment& segment) const {
    const Tape& tape = segment.machine;
    const std::size_t states = tape.arcs.size();
    if (tape.ends.size() != states) return false;
    for (int rule : segment.rules) {
      if (!Below(rule, grammar_.rules.size())) return false;
    }
    for (int start : tape.starts) {
      if (!Below(start, states)) return false;
    }
    for (int i = 0; i < tape.symbols.size(); ++i) {
      if (!Symbol(tape.symbols[i])) return false;
    }
    const auto sound = [&](const TapeArc& arc) {
      return Class(arc.in) && Below(arc.out, static_cast<std::size_t>(tape.symbols.size())) &&
             Below(arc.next, states) && std::isfinite(arc.weight);
    };
    return std::all_of(tape.arcs.begin(), tape.arcs.end(),
                       [&](const auto& arcs) { return std::all_of(arcs.begin(), arcs.end(), sound); });
  }

 private:
  static bool Below(int number, std::size_t end) { return number >= 0 && static_cast<std::size_t>(number) < end; }
  static bool Known(Boundary boundary) { return boundary <= Boundary::kPhrase; }
  static bool Kind(const Letter& letter) {
    const bool fits = letter.kind != FormItem::Kind::kSlot || letter.part.node == kSlotNode;
    return letter.kind <= FormItem::Kind::kFloat && Known(letter.boundary) && fits;
  }
  bool Class(int id) const { return Below(id, classes_.classes.size()); }
  bool Rest(int id) const { return Below(id, classes_.rests.size()); }

  // [flags, class, rest, ...] (compile/rule_machine.h).
  bool Symbol(const Key& string) const {
    if (string.size() % 2 == 0) return false;
    for (std::size_t k = 1; k < string.size(); k += 2) {
      if (!Class(string[k]) || (string[k + 1] != -1 && !Rest(string[k + 1]))) return false;
    }
    return true;
  }

  bool Part(const LetterPart& part) const {
    if (part.node >= grammar_.tree.nodes.size()) return false;
    const TreeNode& node = grammar_.tree[part.node];
    if (node.type == TreeNode::Type::kBinary && part.value > 1) return false;
    if (node.type == TreeNode::Type::kMany && part.value >= node.values.size()) return false;
    return std::all_of(part.daughters.begin(), part.daughters.end(), [&](const LetterPart& daughter) {
      return daughter.node != kSlotNode && Part(daughter) && grammar_.tree[daughter.node].mother == part.node;
    });
  }

  const Grammar& grammar_;
  const LetterClasses::Contents& classes_;
};

std::unique_ptr<Cascade> ReadCascade(ByteReader& file, const Grammar& grammar) {
  Fields<ByteReader> fields(file);
  LetterClasses::Contents classes;
  fields.One(classes);
  auto data = std::make_unique<CascadeData>();
  data->grammar = &grammar;
  fields.List(data->inputs);
  fields.List(data->segments);
  file.Long(data->tags_read);
  const Soundness sound(grammar, classes);
  if (!file.Good() || !file.AtEnd() || data->segments.empty() || !sound.Classes()) return nullptr;
  for (const InputLetter& input : data->inputs) {
    if (!sound.Input(input)) return nullptr;
  }
  for (const Segment& segment : data->segments) {
    if (!sound.OneSegment(segment)) return nullptr;
  }
  data->classes = LetterClasses::Restore(grammar, classes);
  if (data->classes == nullptr) return nullptr;
  return std::make_unique<Cascade>(std::move(data));
}

// ---- the 32 bytes ---------------------------------------------------------------------------------------------
struct Header {
  std::uint32_t format = 0;
  std::uint64_t length = 0;  // of the body
  std::uint32_t checksum = 0;
  std::uint32_t layout = 0;
};

constexpr const char* kAgain = "compile the grammar again: `tiersmith compile GRAMMAR -o FILE`";

void Refuse(Kind kind, const std::string& path, const std::string& what, const std::string& remedy,
            Diagnostics& diagnostics) {
  diagnostics.Error(kind, kNowhere, "'" + path + "' " + what, remedy);
}

void RefuseLayout(const std::string& path, const std::string& what, Diagnostics& diagnostics) {
  Refuse(Kind::kOtherLayout, path, "was compiled by another build of this program, " + what, kAgain, diagnostics);
}

// The body of a file whose first bytes are the magic ones, or nothing after an error.
std::optional<std::string_view> BodyOf(std::string_view bytes, const std::string& path, Header* header,
                                       Diagnostics& diagnostics) {
  const auto cut = [&](const std::string& how) {
    Refuse(Kind::kTruncatedFile, path, "is cut off: " + how, "copy it again, or compile the grammar again",
           diagnostics);
    return std::nullopt;
  };
  const auto altered = [&](const std::string& how) {
    Refuse(Kind::kAlteredFile, path, "was altered after it was written: " + how,
           "copy it again as a binary file, or compile the grammar again", diagnostics);
    return std::nullopt;
  };
  if (bytes.size() < kHeaderSize)
    return cut(fmt::format("it has {} bytes, the head alone of a machine file has {}", bytes.size(), kHeaderSize));
  ByteReader file(bytes.substr(kMagic.size(), kHeaderSize - kMagic.size()));
  std::uint32_t own_checksum = 0;
  file.Number(header->format);
  file.Long(header->length);
  file.Number(header->checksum);
  file.Number(header->layout);
  file.Number(own_checksum);
  if (own_checksum != Checksum(bytes.substr(0, kHeaderSize - 4))) return altered("the checksum of its head is another");
  if (header->format > kMachineFormat) {
    Refuse(Kind::kNewerFile, path,
           fmt::format("was written by a newer release: it has format {}, this release reads format {}", header->format,
                       kMachineFormat),
           "install the newer release, or compile the grammar with this one", diagnostics);
    return std::nullopt;
  }
  if (header->format < kMachineFormat) {
    RefuseLayout(
        path, fmt::format("an older one: it has format {}, this one reads format {}", header->format, kMachineFormat),
        diagnostics);
    return std::nullopt;
  }
  const std::string_view body = bytes.substr(kHeaderSize);
  if (body.size() < header->length)
    return cut(fmt::format("{} of its {} bytes are there", bytes.size(), kHeaderSize + header->length));
  if (body.size() > header->length) return altered("it goes on past its end");
  if (header->checksum != Checksum(body)) return altered("the checksum of its contents is another");
  return body;
}

CompiledGrammar ReadMachine(std::string_view bytes, const std::string& path, const std::shared_ptr<SourceMap>& sources,
                            Diagnostics& diagnostics) {
  Header header;
  const std::optional<std::string_view> body = BodyOf(bytes, path, &header, diagnostics);
  if (!body) return {};
  ByteReader file(*body);
  Preface preface;
  Fields<ByteReader>(file).One(preface);
  if (!file.Good() || preface.sources.empty()) {
    RefuseLayout(path, "which arranges machine files otherwise", diagnostics);
    return {};
  }
  std::map<std::string, std::string> parts;
  for (Source& source : preface.sources) parts.emplace(source.name, std::move(source.text));
  sources->Seal(std::move(parts));
  CompiledGrammar compiled;
  compiled.grammar = LoadGrammar(preface.sources[0].name, sources, diagnostics);
  if (compiled.grammar == nullptr) {
    RefuseLayout(path, "and this one does not accept the grammar in it", diagnostics);
    return {};
  }
  for (const std::string& rule : preface.left_out) LeaveOutRule(rule, compiled.grammar.get());
  if (LayoutOf(*compiled.grammar) != header.layout) {
    RefuseLayout(path, "which numbers segments, rules or messages otherwise", diagnostics);
    return {};
  }
  compiled.cascade = ReadCascade(file, *compiled.grammar);
  if (compiled.cascade == nullptr) {
    RefuseLayout(path, "which arranges machines otherwise", diagnostics);
    return {};
  }
  compiled.left_out = std::move(preface.left_out);
  for (Diagnostic& warning : preface.warnings) compiled.warnings.Add(std::move(warning));
  return compiled;
}

// The first bytes of a machine file, all or as many as there are.
bool IsMachine(std::string_view bytes) {
  return !bytes.empty() && bytes.substr(0, kMagic.size()) == kMagic.substr(0, std::min(bytes.size(), kMagic.size()));
}

// Text has no NUL; UTF-16 does, and has a message of its own.
bool IsBinary(std::string_view bytes) {
  const bool utf16 = bytes.substr(0, 2) == "\xFF\xFE" || bytes.substr(0, 2) == "\xFE\xFF";
  return !utf16 && bytes.find('\0') != std::string_view::npos;
}

}  // namespace

CompiledGrammar OpenGrammar(const std::string& path, const std::shared_ptr<SourceMap>& sources,
                            Diagnostics& diagnostics) {
  CompiledGrammar opened;
  std::string bytes;
  if (!ReadBytes(path, kNowhere, diagnostics, &bytes)) return opened;
  const std::string shown = path == "-" ? "<stdin>" : path;
  if (IsMachine(bytes)) return ReadMachine(bytes, shown, sources, diagnostics);
  if (IsBinary(bytes)) {
    Refuse(Kind::kForeignFile, shown,
           "is neither a grammar nor a machine file of this program: it is no text and begins otherwise",
           "give a .tier file, or what `tiersmith compile GRAMMAR -o FILE` wrote", diagnostics);
    return opened;
  }
  opened.grammar = LoadGrammarText(shown, bytes, sources, diagnostics);
  return opened;
}

std::string WriteMachine(const CompiledGrammar& compiled) {
  const SourceMap& sources = *compiled.grammar->sources;
  Preface preface;
  for (std::uint32_t file = 0; file < sources.size(); ++file) {
    if (!sources.name(file).empty()) preface.sources.push_back({sources.name(file), std::string(sources.text(file))});
  }
  preface.left_out = compiled.left_out;
  preface.warnings = compiled.warnings.all();
  const auto& [grammar, classes, inputs, segments, tags_read] = compiled.cascade->data();
  ByteWriter file;
  Fields<ByteWriter> fields(file);
  fields.One(preface);
  fields.One(classes->Save());
  fields.List(inputs);
  fields.List(segments);
  file.Long(tags_read);
  return WithHeader(file.bytes(), kMachineFormat, LayoutOf(*grammar));
}

std::uint32_t LayoutOf(const Grammar& grammar) {
  ByteWriter numbering;
  for (const TreeNode& node : grammar.tree.nodes) {
    numbering.Text(node.name);
    numbering.Number(node.type);
    numbering.Number(node.mother);
    for (const std::string& value : node.values) numbering.Text(value);
  }
  for (const Symbol& symbol : grammar.inventory.symbols) {
    numbering.Text(symbol.text);
    numbering.Number(symbol.kind);
  }
  for (const Literal& literal : grammar.inventory.literals) numbering.Number(literal.symbol);
  for (const std::string& tag : grammar.tags) numbering.Text(tag);
  for (const Rule& rule : grammar.rules) numbering.Text(rule.name);
  for (Kind kind : AllKinds()) numbering.Text(KindName(kind));
  return Checksum(numbering.bytes());
}

std::string WithHeader(std::string_view body, std::uint32_t format, std::uint32_t layout) {
  ByteWriter header;
  header.Number(format);
  header.Long(body.size());
  header.Number(Checksum(body));
  header.Number(layout);
  std::string bytes = std::string(kMagic) + header.bytes();
  ByteWriter own;
  own.Number(Checksum(bytes));
  return bytes + own.bytes() + std::string(body);
}

}  // namespace tiersmith
