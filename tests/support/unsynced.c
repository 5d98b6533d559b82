/* Keeps, beside every file, what the disk would hold of it if power failed now: its content at its last sync.
 * Preloaded into a program under test; files ending in -shm are memory of the program and never durable. */
#define _GNU_SOURCE
#include <dlfcn.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>
#include <sys/stat.h>

static void keep(int fd) {
    char link[64], path[4096], copy[4200], part[4200], buffer[1 << 16];
    snprintf(link, sizeof link, "/proc/self/fd/%d", fd);
    ssize_t n = readlink(link, path, sizeof path - 1);
    struct stat facts;
    if (n <= 0 || fstat(fd, &facts) || !S_ISREG(facts.st_mode)) return;
    path[n] = 0;
    snprintf(copy, sizeof copy, "%s.durable", path);
    snprintf(part, sizeof part, "%s.durable.part", path);
    int out = open(part, O_WRONLY | O_CREAT | O_TRUNC, 0600);
    if (out < 0) return;
    off_t at = 0;
    while ((n = pread(fd, buffer, sizeof buffer, at)) > 0) {
        if (write(out, buffer, n) != n) break;
        at += n;
    }
    close(out);
    rename(part, copy);
}

int fsync(int fd) {
    int (*real)(int) = dlsym(RTLD_NEXT, "fsync");
    int result = real(fd);
    if (result == 0) keep(fd);
    return result;
}

int fdatasync(int fd) {
    int (*real)(int) = dlsym(RTLD_NEXT, "fdatasync");
    int result = real(fd);
    if (result == 0) keep(fd);
    return result;
}
