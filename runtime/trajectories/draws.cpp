#include "runtime/trajectories/draws.h"

namespace tarn::runtime {
namespace {

constexpr std::uint32_t kFirstMultiplier = 0xD2511F53, kSecondMultiplier = 0xCD9E8D57;
constexpr std::uint32_t kFirstWeyl = 0x9E3779B9, kSecondWeyl = 0xBB67AE85;
constexpr int kRounds = 10;

std::uint32_t low(std::uint64_t x) { return static_cast<std::uint32_t>(x); }
std::uint32_t high(std::uint64_t x) { return static_cast<std::uint32_t>(x >> 32U); }

}  // namespace

PhiloxCounter philox(PhiloxCounter counter, PhiloxKey key) {
  for (int round = 0; round < kRounds; ++round) {
    const std::uint64_t first = std::uint64_t{kFirstMultiplier} * counter[0];
    const std::uint64_t second = std::uint64_t{kSecondMultiplier} * counter[2];
    counter = {high(second) ^ counter[1] ^ key[0], low(second), high(first) ^ counter[3] ^ key[1], low(first)};
    key[0] += kFirstWeyl;
    key[1] += kSecondWeyl;
  }
  return counter;
}

double uniform_draw(std::uint64_t seed, DrawPurpose purpose, std::uint64_t member, std::uint32_t index) {
  const PhiloxCounter words =
      philox({index, static_cast<std::uint32_t>(purpose), low(member), high(member)}, {low(seed), high(seed)});
  const std::uint64_t k = ((std::uint64_t{words[0]} << 32U) | words[1]) >> 12U;
  return (static_cast<double>(k) + 0.5) * 0x1p-52;
}

}  // namespace tarn::runtime
