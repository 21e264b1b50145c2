#include "compiler/lower/words.h"

#include <catch2/catch.hpp>

#include "tests/unit/compiler/lower/matrices.h"

using namespace tarn;
using testing::matrix;

namespace {

std::vector<runtime::PauliWord> words_of_two_bits() {
  std::vector<runtime::PauliWord> words;
  for (std::uint64_t x = 0; x < 4; ++x) {
    for (std::uint64_t z = 0; z < 4; ++z) words.push_back({x, z});
  }
  return words;
}

}  // namespace

TEST_CASE("products of words are products of their matrices") {
  for (const auto& a : words_of_two_bits()) {
    for (const auto& b : words_of_two_bits()) {
      const runtime::WordTerm c = compiler::product(a, b);
      CHECK((matrix(a, 2) * matrix(b, 2) - c.factor * matrix(c.word, 2)).norm() < 1e-15);
    }
  }
}

TEST_CASE("transposes of words are transposes of their matrices") {
  for (const auto& a : words_of_two_bits()) {
    CHECK((matrix(a, 2).transpose() - compiler::transpose_sign(a) * matrix(a, 2)).norm() < 1e-15);
  }
}

TEST_CASE("side by side is a Kronecker product") {
  for (const auto& a : words_of_two_bits()) {
    for (const auto& b : words_of_two_bits()) {
      const auto joined = matrix(compiler::side_by_side(a, b, 2), 4);
      CHECK((joined - testing::kron(matrix(a, 2), matrix(b, 2))).norm() < 1e-15);
    }
  }
}
