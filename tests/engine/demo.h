// The two engines of the demo studies (invented data) and other shared definitions for tests.
#ifndef TEST_ENGINE_DEMO_H
#define TEST_ENGINE_DEMO_H
#include "tacet/engine.h"

// Straight six, 7.15 l, gas; lives in static const data, so any number may be made.
tacet_engine_def demo_six(void);
// Cross-plane V8, 5.78 l, petrol.
tacet_engine_def demo_v8(void);
#define RPM (2 * 3.14159265358979323846 / 60)
#define DEG (3.14159265358979323846 / 180)
#endif
