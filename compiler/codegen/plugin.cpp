#include "compiler/codegen/plugin.h"

#include <dlfcn.h>
#include <llvm/ExecutionEngine/Orc/CompileUtils.h>
#include <llvm/ExecutionEngine/Orc/JITTargetMachineBuilder.h>
#include <llvm/ExecutionEngine/Orc/LLJIT.h>
#include <llvm/Analysis/TargetTransformInfo.h>
#include <llvm/IR/LegacyPassManager.h>
#include <llvm/IR/Verifier.h>
#include <llvm/InitializePasses.h>
#include <llvm/PassRegistry.h>
#include <llvm/Support/TargetSelect.h>
#include <llvm/Target/TargetMachine.h>
#include <llvm/Transforms/InstCombine/InstCombine.h>
#include <llvm/Transforms/Scalar.h>
#include <llvm/Transforms/Utils/Cloning.h>

#include <cstring>
#include <exception>
#include <memory>

#include "compiler/codegen/kernel_table.h"
#include "compiler/ir/text.h"
#include "compiler/ir/verify.h"

namespace tarn::compiler {
namespace {

/// Why a call failed, on its way to the receiver.
struct Failure {
  std::string message;
};

template <class T>
T take(llvm::Expected<T> expected) {
  if (!expected) throw Failure{llvm::toString(expected.takeError())};
  return std::move(*expected);
}

void require(llvm::Error error) {
  if (error) throw Failure{llvm::toString(std::move(error))};
}

void start_target() {
  static const bool started = [] {
    llvm::InitializeNativeTarget();
    llvm::InitializeNativeTargetAsmPrinter();
    auto& registry = *llvm::PassRegistry::getPassRegistry();
    llvm::initializeCore(registry);
    llvm::initializeAnalysis(registry);
    llvm::initializeScalarOpts(registry);
    llvm::initializeInstCombine(registry);
    return true;
  }();
  (void)started;
}

/// The host processor, code for shared objects, the strongest instruction selection.
llvm::orc::JITTargetMachineBuilder host_builder() {
  start_target();
  auto builder = take(llvm::orc::JITTargetMachineBuilder::detectHost());
  builder.setRelocationModel(llvm::Reloc::PIC_);
  builder.setCodeGenOptLevel(llvm::CodeGenOptLevel::Aggressive);
  return builder;
}

unsigned widest(const llvm::orc::JITTargetMachineBuilder& builder) {
  const std::string features = builder.getFeatures().getString();
  const auto has = [&](const char* name) { return features.find(std::string("+") + name + ",") != std::string::npos; };
  if (has("avx512f") && has("avx512dq") && has("avx512vl")) return 8;
  return has("avx2") && has("fma") ? 4 : 2;
}

/// libmvec and libm, which the code calls; opened once, never closed.
void* math_library(bool vector) {
  static void* const vector_library = dlopen("libmvec.so.1", RTLD_NOW | RTLD_LOCAL);
  static void* const scalar_library = dlopen("libm.so.6", RTLD_NOW | RTLD_LOCAL);
  return vector ? vector_library : scalar_library;
}

void* find_math(const std::string& name) {
  void* const library = math_library(name.starts_with("_ZGV"));
  return library ? dlsym(library, name.c_str()) : nullptr;
}

ir::Module read_module(const tarn_codegen_request& request) {
  auto module = ir::from_text({request.text, request.text_size});
  if (!module) throw Failure{"line " + std::to_string(module.error().line) + ": " + module.error().message};
  if (const auto broken = ir::verify(*module); !broken.empty()) throw Failure{broken.front()};
  return std::move(*module);
}

/// Code is emitted as vectors already: a short pipeline is as good as a long one and much quicker.
void tidy(llvm::Module& module, llvm::TargetMachine& machine) {
  llvm::legacy::FunctionPassManager passes(&module);
  passes.add(llvm::createTargetTransformInfoWrapperPass(machine.getTargetIRAnalysis()));
  passes.add(llvm::createEarlyCSEPass());
  passes.add(llvm::createInstructionCombiningPass());
  passes.add(llvm::createCFGSimplificationPass());
  passes.doInitialization();
  for (llvm::Function& function : module) passes.run(function);
  passes.doFinalization();
}

void deliver(const tarn_codegen_request& request, std::uint32_t what, llvm::StringRef bytes) {
  request.receive(request.user, what, bytes.data(), bytes.size());
}

void deliver_text(const tarn_codegen_request& request, llvm::Module& module, llvm::TargetMachine& machine) {
  if (request.wanted & TARN_CODEGEN_LLVM) {
    std::string text;
    llvm::raw_string_ostream out(text);
    module.print(out, nullptr);
    deliver(request, TARN_CODEGEN_LLVM, text);
  }
  if (request.wanted & TARN_CODEGEN_ASSEMBLY) {
    llvm::SmallVector<char, 0> text;
    llvm::raw_svector_ostream out(text);
    llvm::legacy::PassManager passes;
    const auto copy = llvm::CloneModule(module);
    if (machine.addPassesToEmitFile(passes, out, nullptr, llvm::CodeGenFileType::AssemblyFile))
      throw Failure{"the target cannot write assembly"};
    passes.run(*copy);
    deliver(request, TARN_CODEGEN_ASSEMBLY, out.str());
  }
}

void set_target(llvm::Module& code, const llvm::TargetMachine& machine) {
  code.setDataLayout(machine.createDataLayout());
  code.setTargetTriple(machine.getTargetTriple().str());
  code.setPICLevel(llvm::PICLevel::BigPIC);
}

void check_code(const llvm::Module& code) {
  std::string broken;
  llvm::raw_string_ostream sink(broken);
  if (llvm::verifyModule(code, &sink)) throw Failure{"broken code: " + broken};
}

void compile(const tarn_codegen_request& request) {
  const ir::Module module = read_module(request);
  auto builder = host_builder();
  const auto machine = take(builder.createTargetMachine());
  const unsigned most = widest(builder);
  llvm::LLVMContext context;
  llvm::Module code("tarn", context);
  set_target(code, *machine);
  llvm::IRBuilder<> build(context);
  Unit unit{code, build, request.lanes == 0 ? most : std::min(request.lanes, most), machine->getTargetCPU().str(),
            machine->getTargetFeatureString().str(), [](const std::string& name) { return find_math(name) != nullptr; }};
  emit_kernel(unit, module);
  check_code(code);
  tidy(code, *machine);
  deliver_text(request, code, *machine);
  if ((request.wanted & TARN_CODEGEN_OBJECT) == 0) return;
  const auto object = take(llvm::orc::SimpleCompiler(*machine)(code));
  deliver(request, TARN_CODEGEN_OBJECT, object->getBuffer());
}

/// libm's and libmvec's functions by name: the process that opened the plug-in may have neither.
class MathSymbols : public llvm::orc::DefinitionGenerator {
 public:
  llvm::Error tryToGenerate(llvm::orc::LookupState&, llvm::orc::LookupKind, llvm::orc::JITDylib& library,
                            llvm::orc::JITDylibLookupFlags, const llvm::orc::SymbolLookupSet& wanted) override {
    llvm::orc::SymbolMap found;
    for (const auto& [name, flags] : wanted) {
      if (void* const place = find_symbol((*name).str()))
        found[name] = {llvm::orc::ExecutorAddr::fromPtr(place), llvm::JITSymbolFlags::Exported};
    }
    return found.empty() ? llvm::Error::success() : library.define(llvm::orc::absoluteSymbols(std::move(found)));
  }

 private:
  static void* find_symbol(const std::string& name) {
    if (name == "memset") return reinterpret_cast<void*>(&memset);
    return find_math(name);
  }
};

void link_object(llvm::StringRef object, tarn_codegen_loaded& loaded) {
  auto jit = take(llvm::orc::LLJITBuilder().setJITTargetMachineBuilder(host_builder()).create());
  auto& library = jit->getMainJITDylib();
  library.addGenerator(std::make_unique<MathSymbols>());
  require(jit->addObjectFile(llvm::MemoryBuffer::getMemBufferCopy(object, "kernel")));
  loaded.kernel = take(jit->lookup("tarn_kernel_table")).toPtr<const tarn_kernel*>();
  loaded.handle = jit.release();
}

/// Runs `work`; a failure goes to the receiver, since nothing may unwind through the C interface.
template <class Work>
int guarded(tarn_codegen_receive receive, void* user, const Work& work) noexcept {
  std::string message;
  try {
    work();
    return 0;
  } catch (const Failure& failure) {
    message = failure.message;
  } catch (const std::exception& error) {
    message = error.what();
  }
  receive(user, TARN_CODEGEN_MESSAGE, message.data(), message.size());
  return 1;
}

}  // namespace
}  // namespace tarn::compiler

extern "C" {

__attribute__((visibility("default"))) int tarn_codegen_compile(const tarn_codegen_request* request) {
  return tarn::compiler::guarded(request->receive, request->user, [&] { tarn::compiler::compile(*request); });
}

__attribute__((visibility("default"))) int tarn_codegen_load(const char* object, size_t size, tarn_codegen_loaded* loaded,
                                                             tarn_codegen_receive receive, void* user) {
  return tarn::compiler::guarded(receive, user, [&] { tarn::compiler::link_object({object, size}, *loaded); });
}

__attribute__((visibility("default"))) void tarn_codegen_release(void* handle) { delete static_cast<llvm::orc::LLJIT*>(handle); }

}  // extern "C"
