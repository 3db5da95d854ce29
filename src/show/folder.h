// What drawing needs of a result folder. Private to show.
#ifndef SHOW_FOLDER_H
#define SHOW_FOLDER_H
#include "tacet/show.h"

int folder_fd(const tacet_folder *f); // the open directory
// The reason of a failed write that lies back is lost: one more byte, where others are missing
// anyway, meets it again. An errno; 0: this byte went through.
int stream_reason(FILE *to);

#endif
