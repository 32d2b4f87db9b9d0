# Flags every target of the project is built with. Contraction of a*b+c into one rounding is off, so that
# the plain and the vector kernels give the same bits on every machine.
add_library(mirrorband_options INTERFACE)
target_compile_options(mirrorband_options INTERFACE
  -Wall -Wextra -Wconversion -Wshadow -Wstrict-prototypes -Wmissing-prototypes -ffp-contract=off)
target_compile_definitions(mirrorband_options INTERFACE _POSIX_C_SOURCE=200809L _FILE_OFFSET_BITS=64)
if(MIRRORBAND_WARNINGS_AS_ERRORS)
  target_compile_options(mirrorband_options INTERFACE -Werror)
endif()
if(MIRRORBAND_SANITIZE)
  target_compile_options(mirrorband_options INTERFACE
    -fsanitize=address,undefined -fno-sanitize-recover=all -fno-omit-frame-pointer)
  target_link_options(mirrorband_options INTERFACE -fsanitize=address,undefined)
endif()
set(CMAKE_C_FLAGS_RELEASE "-O3 -DNDEBUG")
