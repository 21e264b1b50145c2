// Random chips under every equation against the hierarchy: `validity_calibration FIRST LAST [SECONDS]` prints a line for each
// seed and equation, then how many were called what and how far off those were. 320 seeds take some twenty minutes of one core.
#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <map>

#include "tests/physics/validity/random_cases.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

const char* name_of(Equation equation) {
  if (equation == Equation::redfield) return "redfield";
  if (equation == Equation::davies) return "davies";
  return equation == Equation::universal ? "universal" : "coarse_grained";
}

double quantile(const std::vector<double>& sorted, double q) {
  return sorted[static_cast<std::size_t>(q * static_cast<double>(sorted.size() - 1) + 0.5)];
}

}  // namespace

int main(int argc, char** argv) {
  const auto argument = [&](int k, int otherwise) { return argc > k ? std::atoi(argv[k]) : otherwise; };
  const int first = argument(1, 0), last = argument(2, 320), seconds = argument(3, 15);
  std::map<std::pair<Equation, Validity>, std::vector<double>> errors;
  int without = 0;
  for (int seed = first; seed < last; ++seed) {
    const RandomCase one = random_case(static_cast<unsigned>(seed));
    const auto verdicts = judged_case(one, 2e-3, seconds);
    std::printf("%d: %s%s\n", seed, one.text.c_str(), verdicts ? "" : ": no exact answer");
    if (!verdicts) ++without;
    else
      for (const CaseVerdict& verdict : *verdicts) {
        const Validity validity = verdict.validity.validity;
        errors[{verdict.equation, validity}].push_back(verdict.error);
        std::printf("  %s %s %.4g:", name_of(verdict.equation), validity_name(validity).data(), verdict.error);
        for (const double ratio : verdict.ratios) std::printf(" %.3g", ratio);
        std::printf("\n");
      }
    std::fflush(stdout);
  }
  std::printf("%d cases, %d of them without an exact answer\n", last - first, without);
  for (auto& [key, list] : errors) {
    std::sort(list.begin(), list.end());
    const auto good = std::lower_bound(list.begin(), list.end(), 0.02) - list.begin();
    std::printf("%-15s %-8s %4zu runs, %5.1f %% off by less than 0.02; median %.2g, 90 %% %.2g, 95 %% %.2g, all %.2g\n", name_of(key.first),
                validity_name(key.second).data(), list.size(), 100.0 * static_cast<double>(good) / static_cast<double>(list.size()),
                quantile(list, 0.5), quantile(list, 0.9), quantile(list, 0.95), list.back());
  }
}
