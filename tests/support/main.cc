// The one translation unit that compiles the test framework's main; the other tests link it.
#define CATCH_CONFIG_MAIN
#include <catch2/catch.hpp>
