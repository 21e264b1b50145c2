#pragma once
/// \file Random numbers as pure functions of what they are for: no order of work and no number of threads changes
/// one of them.
///
/// Counter-based generator of 4 words of 32 bits in 10 rounds: Proc. Int. Conf. High Performance Computing,
/// Networking, Storage and Analysis (SC) 2011, 16.

#include <array>
#include <cstdint>

namespace tarn::runtime {

using PhiloxCounter = std::array<std::uint32_t, 4>;
using PhiloxKey = std::array<std::uint32_t, 2>;

/// Philox4x32-10.
PhiloxCounter philox(PhiloxCounter counter, PhiloxKey key);

/// What a draw is for; kinds of draws share no number.
enum class DrawPurpose : std::uint32_t { start = 0, trajectory = 1 };

/// A uniform number in (0, 1), a multiple of 2^-53 that is never 0 or 1: number `index` of member `member`.
/// Counter: index, purpose, low and high half of member; key: low and high half of seed. Of the four words that
/// come out, the first is the upper and the second the lower half of 64 bits, whose upper 52 are k: (k + 1/2) 2^-52.
double uniform_draw(std::uint64_t seed, DrawPurpose purpose, std::uint64_t member, std::uint32_t index);

}  // namespace tarn::runtime
