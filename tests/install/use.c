#include <mirrorband/core.h>
#include <stdio.h>

int main(void)
{
    return printf("Mirrorband %s, 3 dB = %.3f\n", mb_version(), mb_db_power(3.0)) > 0 ? 0 : 1;
}
