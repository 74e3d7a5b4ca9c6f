#pragma once

/// Put in front of a row kernel: the compiler makes a version for each of these CPU generations and
/// the loader picks one at start. Without contraction into fused multiply-adds all versions give the
/// same bits. Off under clang, whose thread sanitiser cannot run such functions.
#if defined(__GNUC__) && !defined(__clang__) && defined(__x86_64__) && !defined(__SANITIZE_THREAD__) && \
    !defined(__SANITIZE_ADDRESS__)
#define SUNBUDGET_CLONES __attribute__((target_clones("arch=x86-64-v4", "arch=x86-64-v3", "default")))
#else
#define SUNBUDGET_CLONES
#endif
