#ifndef BASE_TEXT_H
#define BASE_TEXT_H
#include <stdarg.h>
#include <stddef.h>

// vsnprintf in the C locale.
__attribute__((format(printf, 3, 0))) void text_format(char *out, size_t bytes, const char *format,
                                                       va_list args);
#endif
