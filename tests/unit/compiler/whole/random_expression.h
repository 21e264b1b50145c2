#pragma once
/// \file Random expressions of the language as text, a pure function of the seed.

#include <random>
#include <string>

namespace tarn::test {

/// Declarations that the expressions use: parameters p0 .. p2 (numbers), pf (a frequency), pT (a
/// temperature), functions, and one schedule for each interpolation, reading tables.csv.
extern const char* const kDeclarations;

/// Columns x, y, z, both positive and uneven.
extern const char* const kTables;

/// A plain number of s, of the parameters and, if asked, of t: every operator and function of the
/// language in turn, written so that it is finite everywhere. Values are of order one.
class ExpressionWriter {
 public:
  ExpressionWriter(unsigned seed, bool with_time) : random_(seed), with_time_(with_time) {}
  std::string number(int depth);

 private:
  std::string leaf();
  std::string truth(int depth);
  std::string binary(int depth);
  std::string unary(int depth);
  std::string constant();
  std::size_t pick(std::size_t below) { return std::uniform_int_distribution<std::size_t>(0, below - 1)(random_); }

  std::mt19937 random_;
  bool with_time_;
};

}  // namespace tarn::test
