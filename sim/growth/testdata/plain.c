// Plain preferential attachment without fitness, the far limit of what a loop can do: m links a newcomer, each to the end of
// a ticket drawn from all links and one own ticket a link. Prints seconds for members given as arguments.
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

int main(int argc, char **argv) {
  for (int a = 1; a < argc; a++) {
    long n = atol(argv[a]), m = 2;
    int32_t *target = malloc(sizeof(int32_t) * n * m);
    uint64_t s = 88172645463325252ull;
    struct timespec t0, t1;
    clock_gettime(CLOCK_MONOTONIC, &t0);
    long links = 0;
    for (long v = 1; v < n; v++) {
      uint64_t own = (uint64_t)v * m, all = own + links;
      for (int k = 0; k < m; k++) {
        s ^= s << 13; s ^= s >> 7; s ^= s << 17;
        uint64_t x = (uint64_t)(((__uint128_t)s * all) >> 64);
        target[links + k] = x < own ? (int32_t)(x / m) : target[x - own];
      }
      links += m;
    }
    clock_gettime(CLOCK_MONOTONIC, &t1);
    uint64_t sum = 0;
    for (long i = 0; i < links; i += 997) sum += target[i];
    fprintf(stderr, "%llu\n", (unsigned long long)sum);
    printf("%.6f\n", t1.tv_sec - t0.tv_sec + 1e-9 * (t1.tv_nsec - t0.tv_nsec));
    free(target);
  }
}
