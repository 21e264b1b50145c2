#ifndef TARN_RUNTIME_ABI_KERNEL_H
#define TARN_RUNTIME_ABI_KERNEL_H
/* \file The C interface of compiled models: what a kernel offers and how it is called.

   A compiled model exports one symbol, `const tarn_kernel tarn_kernel_table`. Its entries are
   found by (kind, index); a missing entry was not compiled. Every entry is free of side effects
   other than on its outputs, keeps no state, throws nothing and returns a tarn_status.

   Numbers are in internal units: time ns, angle rad, energies as E/hbar in rad/ns,
   temperatures as k_B T/hbar in rad/ns, charge in e.

   `lanes` is the width W at which scalar functions are evaluated. A call for fewer points pads
   the last group itself, so that a point's bits never depend on how many points are asked for.

   Complex vectors: amplitude i of a plain vector is the pair x[2i], x[2i+1]. In a lane vector,
   part c (0 real, 1 imaginary) of amplitude i in lane l is x[(2i + c) W + l].
   All vectors, prepared data among them, are aligned to 64 bytes. Bit n-1 of an index belongs to the first placed qubit. */

#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

#define TARN_ABI_VERSION 1u

typedef int32_t tarn_status;
enum { TARN_OK = 0, TARN_NOT_FINITE = 1, TARN_BAD_ARGUMENT = 2 };

/* What a model reads beside its arguments: parameters, draws and tables.
   Input i of lane l is inputs[i W + l]; with one set of inputs for all points every lane holds it.
   Table k with m pieces: m + 1 knots, then m values each of c0, c1, c2, c3; on piece j its value
   is c0 + c1 d + c2 d^2 + c3 d^3 with d = x - knot j. m is fixed in the code. */
typedef struct tarn_block {
  const double* inputs;
  const double* const* tables;
} tarn_block;

/* Entry kinds. `index` is the row of a function set or of a generator. */
enum {
  TARN_VALUES = 1,       /* tarn_values_fn: the functions of a set */
  TARN_DERIVATIVES = 2,  /* tarn_values_fn: their derivatives with respect to s */
  TARN_PREPARE = 3,      /* tarn_prepare_fn */
  TARN_APPLY = 4,        /* tarn_apply_fn: y = G x */
  TARN_STAGE = 5,        /* tarn_stage_fn: a combination of vectors and G of it in one sweep */
  TARN_LANE_APPLY = 6,   /* tarn_apply_fn on lane vectors, coefficients per lane */
  TARN_LANE_STAGE = 7    /* tarn_stage_fn on lane vectors, coefficients and weights per lane */
};

/* out[row * count + p] = function `row` at (s[p], t[p], w[p]); point p reads lane p mod W.
   An argument that no function of the set reads may be NULL. */
typedef tarn_status (*tarn_values_fn)(const tarn_block* block, size_t count, const double* s,
                                      const double* t, const double* w, double* out);

/* Fills `prepared` (prepared_doubles of the generator) with what does not depend on any input:
   sign vectors of diagonal words. Called once for each generator and thread or shared read-only. */
typedef tarn_status (*tarn_prepare_fn)(double* prepared);

/* y = G x, G = sum over groups of coefficient[row] times its Pauli words.
   `coefficients` is the output of set 0 for one point (lane entries: row r of lane l at r W + l).
   x and y must not overlap; what is in y before does not matter. */
typedef tarn_status (*tarn_apply_fn)(const double* coefficients, const double* prepared,
                                     const double* x, double* y);

/* argument = sum_j weights[j] vectors[j] for j < count (lane entries: weights[j W + l]),
   then y = G argument. `argument` and y overlap neither each other nor any of the vectors. */
typedef tarn_status (*tarn_stage_fn)(const double* coefficients, const double* prepared,
                                     size_t count, const double* weights,
                                     const double* const* vectors, double* argument, double* y);

typedef struct tarn_entry {
  uint32_t kind;
  uint32_t index;
  void (*code)(void);
} tarn_entry;

typedef struct tarn_function_set {
  const char* name;
  uint32_t rows;
} tarn_function_set;

typedef struct tarn_generator {
  const char* name;
  uint32_t bits;             /* vectors have 2^bits complex amplitudes */
  uint32_t prepared_doubles; /* size of the prepared data */
} tarn_generator;

typedef struct tarn_kernel {
  uint32_t abi_version;
  uint32_t lanes;
  uint32_t inputs;
  uint32_t tables;
  uint32_t sets;
  uint32_t generators;
  uint32_t entries;
  uint32_t reserved;
  const tarn_function_set* set;
  const tarn_generator* generator;
  const tarn_entry* entry;
} tarn_kernel;

#ifdef __cplusplus
}
#endif
#endif
