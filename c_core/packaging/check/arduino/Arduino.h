// What the example sketch uses of the Arduino core, on a desk: the sketch is compiled and run without the SDK.
#ifndef ARDUINO_H
#define ARDUINO_H

#include <cstddef>
#include <cstdio>

struct SerialOnDesk {
    void begin(long) {}
    void print(const char *text) { std::printf("%s", text); }
    void print(double value) { std::printf("%.2f", value); }
    template <typename T> void println(T value)
    {
        print(value);
        std::printf("\n");
    }
};
static SerialOnDesk Serial;
static inline void delay(unsigned long) {}

#endif
