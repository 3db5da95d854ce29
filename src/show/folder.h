// What drawing needs of a result folder. Private to show.
#ifndef SHOW_FOLDER_H
#define SHOW_FOLDER_H
#include "tacet/show.h"

int folder_fd(const tacet_folder *f); // the open directory

#endif
