/* See hash.h: for each byte, hash = (hash xor byte) · prime. */
#include "base/hash.h"

#include <math.h>
#include <string.h>

static const uint64_t PRIME = UINT64_C(0x100000001b3);

uint64_t pk_hash_bytes(uint64_t hash, const void *bytes, size_t count) {
  const unsigned char *b = bytes;
  for (size_t i = 0; i < count; i++) {
    hash = (hash ^ b[i]) * PRIME;
  }
  return hash;
}

uint64_t pk_hash_text(uint64_t hash, const char *text) {
  return pk_hash_bytes(hash, text, strlen(text) + 1);
}

uint64_t pk_hash_number(uint64_t hash, double value) {
  uint64_t bits = 0;
  if (!isnan(value)) {
    memcpy(&bits, &value, sizeof bits);
  } else {
    bits = UINT64_MAX;
  }
  return pk_hash_bytes(hash, &bits, sizeof bits);
}
