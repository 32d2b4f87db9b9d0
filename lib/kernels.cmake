# Instruction-set flags of the kernels that are compiled once for each; which one runs is chosen at run time.
if(CMAKE_SYSTEM_PROCESSOR MATCHES "^(x86_64|AMD64|amd64|i[3-6]86)$")
  set_source_files_properties(filter/kernels/avx2.c PROPERTIES COMPILE_OPTIONS "-mavx2")
endif()
