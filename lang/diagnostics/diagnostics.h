#pragma once
/// \file Messages to the user: what is wrong, where, and what would mend it.
///
/// Kinds and their texts stand in kinds.def. A report is checked when compiling:
///
///     diagnostics.report(span, diag::unknown_name, "delta").remedy("did you mean `Delta`?");

#include <fmt/format.h>

#include <cstddef>
#include <string>
#include <string_view>
#include <type_traits>
#include <unordered_set>
#include <vector>

#include "lang/quantities/dimension.h"
#include "lang/source/span.h"

namespace tarn {

enum class Severity { error, warning, remark };
std::string_view to_text(Severity severity);

/// One row of kinds.def; Args are what its message asks for.
template <class... Args>
struct DiagKind {
  std::string_view name;
  Severity severity;
  fmt::format_string<const Args&...> message;
};

namespace diag {
#define TARN_DIAG(name, severity, message, ...) \
  inline constexpr ::tarn::DiagKind<__VA_ARGS__> name{#name, ::tarn::Severity::severity, message};
#include "lang/diagnostics/kinds.def"
#undef TARN_DIAG
}  // namespace diag

/// Another place that explains the message: "declared here".
struct SecondarySpan {
  Span span;
  std::string note;
  bool operator==(const SecondarySpan&) const = default;
};

struct Diagnostic {
  std::string_view kind;  ///< Stable name, a row of kinds.def.
  Severity severity = Severity::error;
  Span span;
  std::string message;  ///< Lower case, no full stop, code in backticks.
  std::string remedy;   ///< What would mend it; empty if nothing is known.
  std::vector<SecondarySpan> notes;
  bool operator==(const Diagnostic&) const = default;
};

/// Adds to a report just made. Does nothing where the report was a repetition.
class ReportTail {
 public:
  explicit ReportTail(Diagnostic* diagnostic) : diagnostic_(diagnostic) {}
  ReportTail& remedy(std::string text);
  ReportTail& note(Span span, std::string text);

 private:
  Diagnostic* diagnostic_;
};

/// Collects what one run has to say, in the order reported. The same kind with the
/// same text at the same place is kept once; past kMaxReports only the count goes on.
class Diagnostics {
 public:
  static constexpr std::size_t kMaxReports = 100;

  /// Use the result within the statement: a later report may move what it points to.
  template <class... Args>
  ReportTail report(Span span, const DiagKind<Args...>& kind, const std::type_identity_t<Args>&... args) {
    return add({kind.name, kind.severity, span, fmt::format(kind.message, args...), {}, {}});
  }
  ReportTail add(Diagnostic diagnostic);

  /// What `earlier` holds will not be reported here.
  void know(const Diagnostics& earlier) { seen_.insert(earlier.seen_.begin(), earlier.seen_.end()); }

  const std::vector<Diagnostic>& all() const { return reports_; }
  bool has_errors() const { return error_count_ > 0; }
  std::size_t error_count() const { return error_count_; }
  /// Reports left out because there were too many.
  std::size_t dropped() const { return dropped_; }
  bool full() const { return reports_.size() >= kMaxReports; }

 private:
  std::vector<Diagnostic> reports_;
  std::unordered_set<std::string> seen_;
  std::size_t error_count_ = 0;
  std::size_t dropped_ = 0;
};

/// A copy in reading order: by file, then place, then order of report.
std::vector<Diagnostic> in_text_order(const Diagnostics& diagnostics);

/// A row of kinds.def.
struct KindInfo {
  std::string_view name;
  Severity severity;
  std::string_view message;  ///< With `{}` for what a report fills in.
};
/// In the order of kinds.def.
const std::vector<KindInfo>& all_kinds();

}  // namespace tarn
