// A syntax tree as one line of brackets per entry, spans left out: what two trees must have in common to be
// equal. Independent of the printer, so that round trips test something. `N.Place` is (path N Place).
#pragma once

#include <string>

#include "grammar/syntax.h"

// In the namespace of the types, so that the templates find the overloads below them.
namespace tiersmith::syntax {

inline std::string Shape(const Name& n) { return "\"" + n.text + "\""; }
inline std::string Shape(const FormText& f) { return (f.spelled ? "(spelled " : "(form ") + f.raw + ")"; }
inline std::string Shape(const Set& s);
inline std::string Shape(const Pattern& p);

template <class T>
std::string ShapeAll(const std::vector<T>& list) {
  std::string out = "[";
  for (const T& one : list) out += Shape(one) + " ";
  return out + "]";
}
template <class T>
std::string ShapeMaybe(const std::optional<T>& maybe) {
  return maybe ? Shape(*maybe) : "none";
}
template <class E>
std::string Number(E e) {
  return std::to_string(static_cast<int>(e));
}

inline std::string Shape(const Feat& f) {
  return "(feat " + Number(f.kind) + Shape(f.name) + ShapeAll(f.values) + Shape(f.variable) + Number(f.edge) +
         Number(f.side) + ")";
}
inline std::string Shape(const Bundle& b) { return "(bundle " + ShapeAll(b.feats) + ")"; }
inline std::string Shape(const Set& s) {
  return "(set " + Number(s.kind) + Shape(s.bundle) + Shape(s.literal) + Shape(s.name) + ShapeAll(s.args) + ")";
}
inline std::string Shape(const Item& i) {
  return "(item " + Number(i.kind) + ShapeMaybe(i.label) + Shape(i.set) + Shape(i.name) + Number(i.boundary) +
         ShapeMaybe(i.tier) + ShapeAll(i.alternatives) + std::to_string(i.min) + ".." + std::to_string(i.max) + ")";
}
inline std::string Shape(const Pattern& p) { return ShapeAll(p.items); }
inline std::string Shape(const Path& p) {
  return "(path " + Shape(p.label) + Shape(p.node) + Number(p.member) + Shape(p.value) + ")";
}
inline std::string Shape(const Condition& c) {
  return "(test " + Shape(c.left) + Number(c.test) + Shape(c.right) + ")";
}
inline std::string Shape(const TagTest& t) {
  return "(tag " + Number(t.only) + Number(t.scope) + Shape(t.label) + Shape(t.tag) + ")";
}
inline std::string Shape(const Change& c) {
  return "(change " + Number(c.kind) + ShapeAll(c.paths) + Shape(c.label) + Shape(c.bundle) + Shape(c.inserted) +
         Shape(c.content) + Number(c.before) + ")";
}
inline std::string Shape(const Clause& c) {
  return "(clause " + Shape(c.where) + ShapeAll(c.conditions) + ShapeAll(c.unless) + ShapeAll(c.unless_conditions) +
         ShapeAll(c.tags) + ShapeAll(c.changes) + ")";
}
inline std::string Shape(const Daughter& d) {
  return "(daughter " + Number(d.kind) + Shape(d.name) + ShapeAll(d.values) + Number(d.max) + ShapeMaybe(d.room) +
         Number(d.floating) + Number(d.abstract_) + ")";
}
inline std::string Shape(const TreeLine& l) { return "(line " + ShapeAll(l.mothers) + ShapeAll(l.daughters) + ")"; }
inline std::string Shape(const SegmentEntry& e) {
  return "(segment " + Shape(e.symbol) + ShapeMaybe(e.like) + ShapeMaybe(e.bundle) + ")";
}
inline std::string Shape(const ValueRef& v) { return "(value " + Number(v.kind) + Shape(v.name) + ")"; }
inline std::string Shape(const ValuesIn& v) { return "(values " + ShapeAll(v.values) + ShapeMaybe(v.in) + ")"; }
inline std::string Shape(const Diacritic& d) {
  return "(diacritic " + Shape(d.symbol) + Shape(d.bundle) + ShapeMaybe(d.on) + Number(d.surface) + ")";
}
inline std::string Shape(const Suppletion& s) { return "(in " + ShapeAll(s.in) + Shape(s.form) + ")"; }
inline std::string Shape(const LexiconEntry& e) {
  return "(entry " + Number(e.kind) + Shape(e.form) + ShapeMaybe(e.gloss) + ShapeAll(e.tags) +
         (e.weight ? std::to_string(*e.weight) : "none") + ShapeMaybe(e.at) + ShapeAll(e.suppletive) + ")";
}
inline std::string Shape(const Allomorph& a) {
  return "(allomorph " + Shape(a.form) + ShapeMaybe(a.after) + ShapeMaybe(a.at) + ")";
}
inline std::string Shape(const SlotValue& v) { return "(value " + Shape(v.name) + ShapeAll(v.allomorphs) + ")"; }
inline std::string Shape(const ParadigmSlot& s) { return "(slot " + Shape(s.name) + ShapeAll(s.values) + ")"; }
inline std::string Shape(const CellOverride& o) { return "(cell " + ShapeAll(o.values) + ShapeAll(o.allomorphs) + ")"; }
inline std::string Shape(const SpellingLine& l) {
  return "(line " + Shape(l.letters) + Number(l.use) + Shape(l.means) + ShapeMaybe(l.before) + ShapeMaybe(l.after) +
         ShapeMaybe(l.between) + ")";
}
inline std::string Shape(const Column& c) {
  return "(column " + Shape(c.field) + (c.number ? std::to_string(*c.number) : Shape(c.heading)) + Number(c.spelled) +
         ")";
}
inline std::string Shape(const Datum& d) {
  return "(datum " + Shape(d.underlying) + ShapeAll(d.surfaces) + ShapeAll(d.starred) + ShapeMaybe(d.gloss) + ")";
}

struct ShapeTop {
  std::string operator()(const Language& t) const { return "(language " + Shape(t.name) + ")"; }
  std::string operator()(const Tree& t) const { return "(tree " + ShapeAll(t.lines) + ")"; }
  std::string operator()(const Segments& t) const {
    return "(segments " + Number(t.kind) + ShapeMaybe(t.from) + ShapeMaybe(t.added) + ShapeAll(t.entries) +
           ShapeAll(t.without) + ")";
  }
  std::string operator()(const Diacritics& t) const { return "(diacritics " + ShapeAll(t.entries) + ")"; }
  std::string operator()(const Omit& t) const { return "(omit " + ShapeAll(t.entries) + ")"; }
  std::string operator()(const Class& t) const { return "(class " + Shape(t.name) + Shape(t.set) + ")"; }
  std::string operator()(const NamedPattern& t) const { return "(pattern " + Shape(t.name) + Shape(t.pattern) + ")"; }
  std::string operator()(const Rule& t) const {
    return "(rule " + Shape(t.name) + Shape(static_cast<const Clause&>(t)) + ShapeAll(t.otherwise) + Number(t.mode) +
           Number(t.within) + Number(t.prefer) + Number(t.sharing) + Number(t.preserving) +
           (t.probability ? std::to_string(*t.probability) : "always") + Number(t.by_word) + ")";
  }
  std::string operator()(const Lexicon& t) const { return "(lexicon " + ShapeAll(t.entries) + ")"; }
  std::string operator()(const LexiconFrom& t) const { return "(lexicon-from " + Shape(t.path) + ")"; }
  std::string operator()(const Paradigm& t) const {
    return "(paradigm " + Shape(t.name) + ShapeAll(t.stems) + ShapeAll(t.slots) + ShapeAll(t.overrides) + ")";
  }
  std::string operator()(const Spelling& t) const { return "(spelling " + ShapeAll(t.lines) + ")"; }
  std::string operator()(const LengthDoubled& t) const { return "(length-doubled " + ShapeMaybe(t.in) + ")"; }
  std::string operator()(const Print&) const { return "(print)"; }
  std::string operator()(const Data& t) const { return "(data " + Number(t.comparing_length) + ShapeAll(t.rows) + ")"; }
  std::string operator()(const DataFrom& t) const {
    return "(data-from " + Number(t.comparing_length) + Shape(t.path) + ShapeAll(t.columns) + ")";
  }
  std::string operator()(const Include& t) const { return "(include " + Shape(t.path) + ")"; }
  std::string operator()(const Strict&) const { return "(strict)"; }
  std::string operator()(const Complete&) const { return "(complete)"; }
  std::string operator()(const Sharing& t) const { return "(sharing " + Number(t.blocked) + ")"; }
  std::string operator()(const Fuse& t) const { return "(fuse " + Shape(t.node) + ShapeMaybe(t.in) + ")"; }
  std::string operator()(const Unsupported& t) const { return "(unsupported " + t.construct + ")"; }
};

inline std::string Shape(const File& file) {
  std::string out;
  for (const Top& top : file.tops) out += std::visit(ShapeTop(), top) + "\n";
  return out;
}

}  // namespace tiersmith::syntax
