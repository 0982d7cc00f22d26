// Shared parts of the verbs. See command.h. Tested by tests/cli/.
#include "cli/command.h"

#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <iostream>
#include <nlohmann/json.hpp>

#include "base/render_diagnostics.h"
#include "base/utf8.h"
#include "model/names.h"

namespace tiersmith::cli {
namespace {

constexpr std::size_t kBufferSize = 1 << 16;

bool ColorOnStderr() {
  const char* no_color = std::getenv("NO_COLOR");
  if (no_color != nullptr && *no_color != '\0') return false;
  const char* terminal = std::getenv("TERM");
  return isatty(STDERR_FILENO) != 0 && terminal != nullptr && std::strcmp(terminal, "dumb") != 0;
}

// True, or false after saying which name is no rule of the grammar. The machines of a machine file are those of all its
// rules: without one of them they are compiled anew.
bool LeaveOut(const std::vector<std::string>& names, CompiledGrammar& compiled) {
  for (const std::string& name : names) {
    if (LeaveOutRule(name, compiled.grammar.get())) {
      compiled.left_out.push_back(name);
      compiled.cascade = nullptr;
      continue;
    }
    PrintError(fmt::format("--without '{}': the grammar has no such rule", name));
    std::vector<std::string> rules;
    std::string list;
    for (const Rule& rule : compiled.grammar->rules) {
      rules.push_back(rule.name);
      list += (list.empty() ? "'" : ", '") + rule.name + "'";
    }
    PrintHelp(DidYouMean(name, rules) + (list.empty() ? "it has no rules" : "its rules are " + list));
    return false;
  }
  return true;
}

// "text, tsv or json".
std::string ListOf(const std::vector<std::string>& names, const char* last) {
  std::string list;
  for (std::size_t i = 0; i < names.size(); ++i) list += (i == 0 ? "" : i + 1 == names.size() ? last : ", ") + names[i];
  return list;
}

}  // namespace

void AddCommonOptions(CLI::App& verb, CommonOptions& options) {
  verb.add_option("GRAMMAR", options.grammar, "a .tier file or a machine file; - is standard input")->required();
  verb.add_option("--without", options.without, "leave a rule out (may be given several times)")
      ->type_name("RULE")
      ->allow_extra_args(false);
  verb.add_option("--format", options.format, ListOf(options.formats, " or "))->type_name("FORMAT");
  verb.add_option("-o,--output", options.output, "write to this file")->type_name("FILE");
}

void PrintDiagnostics(const Diagnostics& diagnostics, const SourceMap& sources, bool json) {
  if (diagnostics.all().empty()) return;
  std::cerr << (json ? RenderDiagnosticsJson(diagnostics, sources)
                     : RenderDiagnostics(diagnostics, sources, ColorOnStderr()));
}

void PrintError(const std::string& message) {
  std::cerr << (ColorOnStderr() ? "tiersmith: \033[1;31merror:\033[0m " : "tiersmith: error: ") << message << '\n';
}

void PrintHelp(const std::string& message) {
  std::cerr << (ColorOnStderr() ? "  \033[1;32mhelp:\033[0m " : "  help: ") << message << '\n';
}

int CodeFor(const Diagnostics& diagnostics) {
  for (const Diagnostic& diagnostic : diagnostics.all()) {
    if (diagnostic.severity != Severity::kError) continue;
    switch (diagnostic.kind) {
      case Kind::kMissingFile:
      case Kind::kForeignFile:
      case Kind::kTruncatedFile:
      case Kind::kAlteredFile:
      case Kind::kNewerFile:
      case Kind::kOtherLayout:
        return kFiles;
      default:
        break;
    }
  }
  return kUsage;
}

void PrintNote(const std::string& message) { std::cerr << "tiersmith: note: " << message << '\n'; }

Loaded LoadOnly(const CommonOptions& options) {
  Loaded loaded;
  loaded.code = kUsage;
  if (std::find(options.formats.begin(), options.formats.end(), options.format) == options.formats.end()) {
    const bool later = options.format == "md" || options.format == "latex" || options.format == "html";
    PrintError(fmt::format("--format {}: {}", options.format, later ? "not supported yet" : "no such format"));
    PrintHelp("the formats are " + ListOf(options.formats, " and "));
    return loaded;
  }
  loaded.sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  static_cast<CompiledGrammar&>(loaded) = OpenGrammar(options.grammar, loaded.sources, diagnostics);
  PrintDiagnostics(diagnostics, *loaded.sources, options.json());
  if (loaded.grammar == nullptr) {
    loaded.code = CodeFor(diagnostics);
  } else if (LeaveOut(options.without, loaded)) {
    loaded.code = kFine;
  }
  return loaded;
}

Loaded LoadAndCompile(const CommonOptions& options) {
  Loaded loaded = LoadOnly(options);
  if (loaded.code != kFine) return loaded;
  if (loaded.cascade == nullptr) {
    loaded.warnings = {};
    loaded.cascade = Compile(*loaded.grammar, Limits{}, loaded.warnings);
  }
  PrintDiagnostics(loaded.warnings, *loaded.sources, options.json());
  if (loaded.cascade == nullptr) loaded.code = CodeFor(loaded.warnings);
  return loaded;
}

// ---- output -------------------------------------------------------------------------------------------
Output::Output(const std::string& path) : path_(path == "-" ? "" : path) {
  if (path_.empty()) {
    file_ = stdout;
    return;
  }
  temporary_ = path_ + ".part" + std::to_string(getpid());
  file_ = std::fopen(temporary_.c_str(), "wb");
  if (file_ == nullptr) PrintError(fmt::format("cannot write '{}': {}", path_, std::strerror(errno)));
}

Output::~Output() {
  if (file_ == nullptr) return;
  if (path_.empty()) {
    Flush();
    return;
  }
  std::fclose(file_);
  std::remove(temporary_.c_str());
}

bool Output::to_terminal() const { return path_.empty() && isatty(STDOUT_FILENO) != 0; }

bool Output::Drain() {
  if (std::fwrite(buffer_.data(), 1, buffer_.size(), file_) != buffer_.size()) failed_ = true;
  buffer_.clear();
  return !failed_;
}

void Output::Write(std::string_view text) {
  buffer_ += text;
  if (buffer_.size() >= kBufferSize) Drain();
}

void Output::Flush() {
  if (!Drain() || std::fflush(file_) != 0) failed_ = true;
}

int Output::Finish() {
  Flush();
  const std::string shown = path_.empty() ? "standard output" : "'" + path_ + "'";
  if (!path_.empty()) {
    if (std::fclose(file_) != 0) failed_ = true;
    file_ = nullptr;
    if (!failed_ && std::rename(temporary_.c_str(), path_.c_str()) != 0) failed_ = true;
    if (failed_) std::remove(temporary_.c_str());
  }
  if (!failed_) return kFine;
  PrintError(fmt::format("writing {} failed: {}", shown, std::strerror(errno)));
  return kFiles;
}

// ---- forms ----------------------------------------------------------------------------------------------
FormSource::FormSource(std::vector<std::string> arguments) : arguments_(std::move(arguments)) {
  stdin_ = arguments_.empty() || (arguments_.size() == 1 && arguments_[0] == "-");
}

bool FormSource::Next(std::string* form, int* number) {
  if (!stdin_) {
    if (next_ >= static_cast<int>(arguments_.size())) return false;
    *form = arguments_[static_cast<std::size_t>(next_)];
  } else {
    if (!std::getline(std::cin, *form)) return false;
    if (!form->empty() && form->back() == '\r') form->pop_back();
    if (next_ == 0 && form->compare(0, 3, "\xEF\xBB\xBF") == 0) form->erase(0, 3);
  }
  *number = ++next_;
  return true;
}

bool FormSource::WouldWait() const { return stdin_ && std::cin.rdbuf()->in_avail() <= 0; }

bool FormSource::failed() const { return stdin_ && std::cin.bad(); }

void PrintTextError(const FormSource& source, const std::string& form, int number, const TextError& error, bool json) {
  SourceMap sources;
  const std::uint32_t file = sources.Add(source.from_stdin() ? "<stdin>" : "argument", form, number);
  const auto begin = static_cast<std::uint32_t>(error.offset);
  Diagnostics diagnostics;
  diagnostics.Error(error.kind, {file, begin, begin + static_cast<std::uint32_t>(error.length)}, error.message,
                    error.remedy);
  PrintDiagnostics(diagnostics, sources, json);
}

bool BothFromStdin(const CommonOptions& options, const std::vector<std::string>& forms) {
  if (options.grammar != "-" || !FormSource(forms).from_stdin()) return false;
  PrintError("the grammar and the forms cannot both be read from standard input");
  PrintHelp("give the forms as arguments");
  return true;
}

std::string Field(std::string_view text) {
  std::string field;
  for (const char c : text) {
    if (c == '\t') {
      field += "\\t";
    } else if (c == '\n') {
      field += "\\n";
    } else {
      field += c;
    }
  }
  return field;
}

std::string JsonString(std::string_view text) {
  return nlohmann::json(std::string(text)).dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
}

std::string Table(const std::vector<std::vector<std::string>>& rows, const std::vector<bool>& right) {
  std::vector<int> widths(right.size(), 0);
  for (const auto& row : rows) {
    for (std::size_t i = 0; i < row.size(); ++i) widths[i] = std::max(widths[i], DisplayWidth(row[i]));
  }
  std::string out;
  for (const auto& row : rows) {
    std::string line;
    for (std::size_t i = 0; i < row.size(); ++i) {
      const std::string padding(static_cast<std::size_t>(widths[i] - DisplayWidth(row[i])), ' ');
      line += i == 0 ? "" : "  ";
      line += right[i] ? padding + row[i] : row[i] + padding;
    }
    while (!line.empty() && line.back() == ' ') line.pop_back();
    out += line + "\n";
  }
  return out;
}

}  // namespace tiersmith::cli
