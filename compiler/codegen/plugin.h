#pragma once
/// \file The C interface of the code generator's plug-in, libtarn_codegen.so: text in, bytes out.
/// The plug-in is opened only when a kernel is not in the cache; nothing else knows LLVM.

#include <stddef.h>
#include <stdint.h>

#include "runtime/abi/kernel.h"

#ifdef __cplusplus
extern "C" {
#endif

enum {
  TARN_CODEGEN_OBJECT = 1,   /* relocatable, position-independent ELF object */
  TARN_CODEGEN_LLVM = 2,     /* LLVM IR as text, as it enters instruction selection */
  TARN_CODEGEN_ASSEMBLY = 4, /* assembly text */
  TARN_CODEGEN_MESSAGE = 8   /* why a call failed */
};

/* Takes one result; the bytes are the receiver's only until it returns. */
typedef void (*tarn_codegen_receive)(void* user, uint32_t what, const char* bytes, size_t size);

typedef struct tarn_codegen_request {
  const char* text; /* canonical text of an optimised module */
  size_t text_size;
  uint32_t lanes;   /* 2, 4 or 8; 0 for the widest the processor has */
  uint32_t wanted;  /* TARN_CODEGEN_ bits of what to deliver */
  tarn_codegen_receive receive;
  void* user;
} tarn_codegen_request;

typedef struct tarn_codegen_loaded {
  const tarn_kernel* kernel;
  void* handle;
} tarn_codegen_loaded;

/* Compiles for this very processor. 0, or 1 after delivering a message. */
typedef int (*tarn_codegen_compile_fn)(const tarn_codegen_request* request);
/* Links an object into this process. 0, or 1 after delivering a message. */
typedef int (*tarn_codegen_load_fn)(const char* object, size_t size, tarn_codegen_loaded* loaded,
                                    tarn_codegen_receive receive, void* user);
/* Frees what load made; no code of it may be running. */
typedef void (*tarn_codegen_release_fn)(void* handle);

#define TARN_CODEGEN_COMPILE "tarn_codegen_compile"
#define TARN_CODEGEN_LOAD "tarn_codegen_load"
#define TARN_CODEGEN_RELEASE "tarn_codegen_release"

#ifdef __cplusplus
}
#endif
