/* The system's wall clock, ahead by the seconds that a file holds; loaded before the C library. */
#define _GNU_SOURCE
#include <fcntl.h>
#include <stdint.h>
#include <stdlib.h>
#include <sys/mman.h>
#include <sys/syscall.h>
#include <time.h>
#include <unistd.h>

static const volatile int64_t *ahead_s;

__attribute__((constructor)) static void join(void)
{
    const char *path = getenv("WALLCLOCK_AHEAD");
    int file = path ? open(path, O_RDONLY | O_CLOEXEC) : -1;
    void *memory = mmap(NULL, sizeof *ahead_s, PROT_READ, MAP_SHARED, file, 0);
    if (memory != MAP_FAILED)
        ahead_s = memory;
    if (file >= 0)
        close(file);
}

int clock_gettime(clockid_t clock, struct timespec *now)
{
    int failed = (int)syscall(SYS_clock_gettime, clock, now);
    if (!failed && clock == CLOCK_REALTIME && ahead_s)
        now->tv_sec += *ahead_s;
    return failed;
}
