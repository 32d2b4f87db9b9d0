# The library is installed into a folder of its own and used from there as a stranger would use it.
if(NOT MIRRORBAND_SANITIZE)
  add_test(NAME install/use COMMAND sh ${CMAKE_CURRENT_SOURCE_DIR}/install/use ${CMAKE_BINARY_DIR} ${CMAKE_COMMAND})
endif()
