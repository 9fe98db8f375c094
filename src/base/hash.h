/* A short fingerprint of bytes: FNV-1a of 64 bits (G. Fowler, L. C. Noll, K.-P. Vo). For telling
 * whether two things are the same, not for keeping secrets. */
#ifndef PK_BASE_HASH_H
#define PK_BASE_HASH_H

#include <stddef.h>
#include <stdint.h>

#define PK_HASH_START UINT64_C(0xcbf29ce484222325)

/* The fingerprint of what was hashed before, followed by `count` bytes. */
uint64_t pk_hash_bytes(uint64_t hash, const void *bytes, size_t count);

/* Followed by a text and its end, so that "ab", "c" differs from "a", "bc". */
uint64_t pk_hash_text(uint64_t hash, const char *text);

/* Followed by a number; all NaN are the same, 0 and -0 are not. */
uint64_t pk_hash_number(uint64_t hash, double value);

#endif
