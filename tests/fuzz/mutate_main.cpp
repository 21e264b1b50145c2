/// \file Runs the fuzz target on mutated models where no coverage-guided fuzzer is at
/// hand: fuzz_parse ROUNDS SEED FOLDER... A seed repeats its inputs.

#include <algorithm>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <random>
#include <sstream>
#include <string>
#include <vector>

#include "tests/fuzz/target.h"

namespace {

namespace fs = std::filesystem;

std::vector<std::string> read_models(int count, char** folders) {
  std::vector<fs::path> paths;
  for (int i = 0; i < count; ++i) {
    for (const auto& entry : fs::recursive_directory_iterator(folders[i])) {
      if (entry.path().extension() == ".tarn") paths.push_back(entry.path());
    }
  }
  std::sort(paths.begin(), paths.end());
  std::vector<std::string> models;
  for (const fs::path& path : paths) {
    std::ifstream in(path, std::ios::binary);
    std::stringstream text;
    text << in.rdbuf();
    models.push_back(text.str());
  }
  return models;
}

class Mutator {
 public:
  Mutator(const std::vector<std::string>& models, unsigned seed) : models_(models), random_(seed) {}

  std::string next() {
    std::string text = models_[below(models_.size())];
    for (std::size_t n = 1 + below(6); n > 0; --n) mutate(text);
    return text;
  }

 private:
  std::size_t below(std::size_t limit) { return limit == 0 ? 0 : random_() % limit; }

  void mutate(std::string& text) {
    const std::size_t at = below(text.size() + 1);
    const std::size_t length = below(std::min<std::size_t>(40, text.size() - at) + 1);
    switch (below(6)) {
      case 0: text.erase(at, length); break;
      case 1: text.insert(at, text.substr(below(text.size() + 1), below(60))); break;
      case 2: text.insert(at, piece()); break;
      case 3: text.insert(at, 1, static_cast<char>(random_() % 256)); break;
      case 4: text.replace(at, length, piece()); break;
      default: {
        const std::string& other = models_[below(models_.size())];
        text.insert(at, other.substr(below(other.size() + 1), below(200)));
      }
    }
  }

  std::string piece() {
    static const char* const kPieces[] = {"(", ")", "{", "}", "[", "]", "\n", " ", "#", "##", "\"", "=", "--", "..", "-", "^",
                                          "1", "0.5 GHz", "let x = 1", "if a then b else c", "|0><1|", "for i in 0 .. 2",
                                          " ## doc\n", "[1/us]", "\t", "\r\n", "use spectra", "\xCE\xBC", "{i}", ","};
    return kPieces[below(std::size(kPieces))];
  }

  const std::vector<std::string>& models_;
  std::mt19937 random_;
};

}  // namespace

int main(int argc, char** argv) {
  if (argc < 4) {
    std::cerr << "usage: fuzz_parse ROUNDS SEED FOLDER...\n";
    return 2;
  }
  const std::vector<std::string> models = read_models(argc - 3, argv + 3);
  if (models.empty()) {
    std::cerr << "no models\n";
    return 2;
  }
  Mutator mutator(models, static_cast<unsigned>(std::atoi(argv[2])));
  for (long round = std::atol(argv[1]); round > 0; --round) {
    const std::string text = mutator.next();
    LLVMFuzzerTestOneInput(reinterpret_cast<const std::uint8_t*>(text.data()), text.size());
  }
  return 0;
}
