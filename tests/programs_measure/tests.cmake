# mb-measure as a user would run it, on files made by the other programs and by numpy.
foreach(name IN ITEMS measure_iq measure_audio measure_bad_input)
  if(TARGET mb-measure)
    add_test(NAME programs_measure/${name}
             COMMAND ${MIRRORBAND_PYTHON} -B ${CMAKE_CURRENT_SOURCE_DIR}/programs_measure/${name}.py
                     $<TARGET_FILE_DIR:mb-measure>)
  endif()
endforeach()
