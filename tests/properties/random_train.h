// Random valid trains: any tree, plain and geared links, every kind of damping.
#ifndef TEST_RANDOM_TRAIN_H
#define TEST_RANDOM_TRAIN_H
#include "trains.h"
#include "trial.h"

typedef struct {
    unsigned most_nodes;
    bool marched; // only what has a law in time, on a scale that a march gets through quickly
    bool damped;  // every link and so every mode
} train_wish;

// The same chance gives the same train: call it again for one to change. free() or hand on.
bench_train *random_train(chance c, const train_wish *wish);
void random_train_write(trial *t, const bench_train *b); // as a study's section train
#endif
