# The benchmark: a program to be run by hand (build/tests/bench), not a test. Every bench_*.c holds one function
# that prints its lines.
file(GLOB bench_sources CONFIGURE_DEPENDS ${CMAKE_CURRENT_LIST_DIR}/bench*.c)
find_library(LIQUID_LIBRARY liquid)
if(LIQUID_LIBRARY)
  add_executable(bench ${bench_sources})
  target_link_libraries(bench PRIVATE mirrorband_static ${LIQUID_LIBRARY} m mirrorband_options)
endif()
