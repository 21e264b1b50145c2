#pragma once
/// \file Models given as text, checked and instantiated; a test fails with the messages if they are wrong.

#include <filesystem>
#include <string>

#include "lang/check/check.h"

namespace tarn::test {

struct TextModel {
  Program program;
  Instance instance;  ///< Of the first experiment.
  const SourceSet& sources() const { return program.sources(); }
};

/// Tables are looked for in `folder`.
TextModel text_model(const std::string& text, const std::filesystem::path& folder, const Overrides& overrides = {});

}  // namespace tarn::test
