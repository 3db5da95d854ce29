#ifndef STUDY_KEYS_H
#define STUDY_KEYS_H
#include "tacet/study.h"

const tacet_section *study_screen_keys(void);
#endif
