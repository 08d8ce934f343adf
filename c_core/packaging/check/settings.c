/* Prints what the core was built with, as the application sees it and as the library does. */
#include <stdio.h>

#include "magnav_core.h"

int main(void)
{
    printf("real %d %d, degree %d %d, order %d\n", (int)sizeof(magnav_real), (int)magnav_real_bytes(),
           (int)MAGNAV_MAX_DEGREE, (int)magnav_max_degree(), (int)MAGNAV_MAX_TIME_ORDER);
    return 0;
}
