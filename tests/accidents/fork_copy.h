// A copy of the process that works in a copy of its working folder.
#ifndef FORK_COPY_H
#define FORK_COPY_H
#include <stdbool.h>
#include <sys/types.h>

// Forks. The child's working folder is `copies`/n, a copy of the parent's, and every file or folder
// that it has open is open there at the same place; what lies elsewhere is opened anew, so that no
// position is shared. A child that takes longer than a minute is ended by SIGALRM.
pid_t fork_copy(const char *copies, unsigned long n);
_Noreturn void fork_copy_failed(const char *what); // says why and ends the process with 99

#endif
