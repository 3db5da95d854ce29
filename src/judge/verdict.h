// What a margin says. Of this room only.
#ifndef JUDGE_VERDICT_H
#define JUDGE_VERDICT_H
#include "tacet/judge.h"

tacet_verdict verdict_of(double margin_db, double reserve_db);

#endif
