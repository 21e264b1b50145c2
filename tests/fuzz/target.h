#pragma once
/// \file What is done with each input: it must end, without a crash and without a broken
/// invariant, and a text that tidies must tidy to itself and mean the same.

#include <cstddef>
#include <cstdint>

/// The entry that a coverage-guided fuzzer looks for. Aborts on a broken property.
extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size);
