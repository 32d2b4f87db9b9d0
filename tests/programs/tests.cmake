# The built programs, run as a user would: arguments and input in; files, sentences and exit status out.
foreach(name IN ITEMS main_job configs pipes endpoints bad_input bad_config interrupts no_signal first_contact memory)
  if(TARGET mb-receive AND NOT (name STREQUAL memory AND MIRRORBAND_SANITIZE))
    add_test(NAME programs/${name} COMMAND ${MIRRORBAND_PYTHON} -B ${CMAKE_CURRENT_SOURCE_DIR}/programs/${name}.py
                                           $<TARGET_FILE_DIR:mb-receive>)
  endif()
endforeach()
