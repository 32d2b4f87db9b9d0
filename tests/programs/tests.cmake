# The built programs, run as a user would: arguments and input in; files, sentences and exit status out.
set(program_tests main_job configs pipes endpoints bad_input bad_config interrupts no_signal)
if(NOT MIRRORBAND_SANITIZE) # which takes memory and time of its own
  list(APPEND program_tests memory)
  if(TARGET mb-measure)
    list(APPEND program_tests first_contact)
  endif()
endif()
foreach(name IN LISTS program_tests)
  add_test(NAME programs/${name} COMMAND ${MIRRORBAND_PYTHON} -B ${CMAKE_CURRENT_SOURCE_DIR}/programs/${name}.py
                                         $<TARGET_FILE_DIR:mb-receive>)
endforeach()
