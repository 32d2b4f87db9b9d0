# What the programs of this room wrote is looked at by other programs.
find_program(MIRRORBAND_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
if(MIRRORBAND_PYTHON)
  set_tests_properties(files/test_sigmf PROPERTIES FIXTURES_SETUP files_sigmf)
  add_test(NAME files/schema COMMAND ${MIRRORBAND_PYTHON} ${CMAKE_CURRENT_SOURCE_DIR}/files/check_sigmf.py
                                     ${CMAKE_BINARY_DIR}/files_sigmf)
  set_tests_properties(files/schema PROPERTIES FIXTURES_REQUIRED files_sigmf SKIP_RETURN_CODE 77)
  set_tests_properties(files/test_plot PROPERTIES FIXTURES_SETUP files_plot)
  add_test(NAME files/picture COMMAND ${MIRRORBAND_PYTHON} ${CMAKE_CURRENT_SOURCE_DIR}/files/check_svg.py
                                      ${CMAKE_BINARY_DIR}/files_plot)
  set_tests_properties(files/picture PROPERTIES FIXTURES_REQUIRED files_plot)
endif()
