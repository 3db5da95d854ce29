// Gives kept inputs to a fuzz target in a program of its own, without a fuzzer.
// usage: fuzz_<target> FILE|FOLDER ..   prints how many were read; ends by a signal on a finding
#include "fuzz.h"
#include <dirent.h>
#include <sys/stat.h>

#define MOST_BYTES ((size_t)1 << 20)

static size_t replay_file(const char *path)
{
    FILE *from = fopen(path, "rb");
    uint8_t *bytes = malloc(MOST_BYTES);
    if (!from || !bytes) {
        fprintf(stderr, "cannot read %s\n", path);
        exit(1);
    }
    size_t n = fread(bytes, 1, MOST_BYTES, from);
    fclose(from);
    fprintf(stderr, "%s\n", path);   // the last line names what broke
    uint8_t *exact = malloc(n + !n); // reading past the end is then seen by a sanitizer
    if (!exact) exit(1);
    if (n) memcpy(exact, bytes, n);
    free(bytes);
    (void)LLVMFuzzerTestOneInput(exact, n);
    free(exact);
    return 1;
}

static int plain_name(const struct dirent *entry)
{
    return entry->d_name[0] != '.';
}

static size_t replay(const char *path)
{
    struct stat about;
    struct dirent **entries;
    size_t done = 0;
    if (stat(path, &about) != 0 || !S_ISDIR(about.st_mode)) return replay_file(path);
    int n = scandir(path, &entries, plain_name, alphasort);
    for (int i = 0; i < n; i++) {
        char name[4096];
        snprintf(name, sizeof name, "%s/%s", path, entries[i]->d_name);
        done += replay(name);
        free(entries[i]);
    }
    if (n >= 0) free(entries);
    return done;
}

int main(int argc, char **argv)
{
    size_t done = 0;
    (void)LLVMFuzzerInitialize(&argc, &argv);
    for (int i = 1; i < argc; i++)
        done += replay(argv[i]);
    printf("%zu inputs\n", done);
    return done ? 0 : 1; // a corpus that is not there proves nothing
}
