/* Writes the manual page mirrorband(5) to the file named. */
#include "mirrorband/config.h"

int main(int argc, char **argv)
{
    if (argc != 2) {
        (void)fprintf(stderr, "usage: config_man_page FILE\n");
        return 2;
    }
    FILE *file = fopen(argv[1], "w");
    if (file == NULL || mb_config_man_page(file) != MB_OK || fclose(file) != 0) {
        perror(argv[1]);
        return 1;
    }
    return 0;
}
