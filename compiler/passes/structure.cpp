#include "compiler/passes/structure.h"

#include <bit>

namespace tarn::compiler {

using namespace ir;

namespace {

Structure structure_of(const Generator& generator) {
  Structure found{true, true, true};
  for (const auto& group : generator.sum.groups) {
    for (const auto& term : group.terms) {
      const bool turned = (std::popcount(term.word.x & term.word.z) & 1) != 0;  // i^odd: real and imaginary swap
      const bool has_real = (turned ? term.factor.imag() : term.factor.real()) != 0;
      const bool has_imaginary = (turned ? term.factor.real() : term.factor.imag()) != 0;
      found.real_words = found.real_words && !has_imaginary;
      found.imaginary = found.imaginary && !has_real;
      found.diagonal = found.diagonal && term.word.x == 0;
    }
  }
  if (found.real_words) found.imaginary = false;  // no words at all
  return found;
}

}  // namespace

Module find_structure(Module module) {
  for (Generator& generator : module.generators) generator.structure = structure_of(generator);
  return module;
}

}  // namespace tarn::compiler
