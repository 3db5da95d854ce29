#ifndef PATTERN_GCD_H
#define PATTERN_GCD_H

static inline unsigned gcd(unsigned a, unsigned b)
{
    while (b) {
        unsigned rest = a % b;
        a = b;
        b = rest;
    }
    return a;
}
#endif
