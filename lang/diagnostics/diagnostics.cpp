#include "lang/diagnostics/diagnostics.h"

#include <algorithm>
#include <tuple>

namespace tarn {

std::string_view to_text(Severity severity) {
  switch (severity) {
    case Severity::error: return "error";
    case Severity::warning: return "warning";
    case Severity::remark: return "remark";
  }
  return "error";
}

ReportTail& ReportTail::remedy(std::string text) {
  if (diagnostic_ != nullptr) diagnostic_->remedy = std::move(text);
  return *this;
}

ReportTail& ReportTail::note(Span span, std::string text) {
  if (diagnostic_ != nullptr) diagnostic_->notes.push_back({span, std::move(text)});
  return *this;
}

ReportTail Diagnostics::add(Diagnostic diagnostic) {
  std::string key = fmt::format("{} {} {} {} {}", diagnostic.kind, diagnostic.span.file.row, diagnostic.span.begin,
                                diagnostic.span.end, diagnostic.message);
  if (seen_.contains(key)) return ReportTail(nullptr);
  if (diagnostic.severity == Severity::error) ++error_count_;
  if (full()) {
    ++dropped_;
    return ReportTail(nullptr);
  }
  seen_.insert(std::move(key));
  reports_.push_back(std::move(diagnostic));
  return ReportTail(&reports_.back());
}

std::vector<Diagnostic> in_text_order(const Diagnostics& diagnostics) {
  std::vector<Diagnostic> sorted = diagnostics.all();
  const auto key = [](const Diagnostic& d) { return std::tuple(d.span.file.row, d.span.begin, d.span.end); };
  std::stable_sort(sorted.begin(), sorted.end(),
                   [&](const Diagnostic& a, const Diagnostic& b) { return key(a) < key(b); });
  return sorted;
}

const std::vector<KindInfo>& all_kinds() {
  static const std::vector<KindInfo> kinds = {
#define TARN_DIAG(name, severity, message, ...) {#name, Severity::severity, message},
#include "lang/diagnostics/kinds.def"
#undef TARN_DIAG
  };
  return kinds;
}

}  // namespace tarn
