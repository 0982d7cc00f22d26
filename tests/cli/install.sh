# The library installed into a prefix is found by find_package(Tiersmith) and used by a small program; the installed
# command finds its segments by itself.
source "$(dirname "$0")/common.inc"
code=0; out=""; err=""
cmake --install "${TIERSMITH_BUILD:?}" --prefix "$t/a prefix" >"$t/.out" 2>&1 || { cat "$t/.out"; exit 1; }

mkdir "$t/user"
cat >"$t/user/CMakeLists.txt" <<'USER'
cmake_minimum_required(VERSION 3.22)
project(User CXX)
find_package(Tiersmith 0.1 REQUIRED)
add_executable(user user.cc)
target_link_libraries(user PRIVATE Tiersmith::tiersmith)
target_compile_definitions(user PRIVATE RULESETS="${Tiersmith_RULESETS}")
USER
cat >"$t/user/user.cc" <<'USER'
#include <cstdlib>
#include <iostream>
#include "run/run.h"
int main(int, char** argv) {
  setenv("TIERSMITH_RULESETS", RULESETS, 1);
  tiersmith::Diagnostics diagnostics;
  auto sources = std::make_shared<tiersmith::SourceMap>();
  auto grammar = tiersmith::LoadGrammar(argv[1], sources, diagnostics);
  auto cascade = tiersmith::Compile(*grammar, {}, diagnostics);
  std::string surface;
  tiersmith::TextError error;
  tiersmith::Runner(*grammar, *cascade).Derive("un-koɡ", &surface, &error);
  std::cout << surface << '\n';
}
USER
(cmake -S "$t/user" -B "$t/user/build" -DCMAKE_PREFIX_PATH="$t/a prefix" && cmake --build "$t/user/build") >"$t/.out" 2>&1 ||
  { cat "$t/.out"; exit 1; }
out="$("$t/user/build/user" "$velmari")"
is_out 'uŋkok'

unset TIERSMITH_RULESETS
cd "$t"
out="$("$t/a prefix/bin/tiersmith" derive "$velmari" un-koɡ)"
is_out 'uŋkok'
done_testing
