# Statements about the tree as a whole; each is a script of its own that says every fault it finds.
find_program(MIRRORBAND_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
find_program(MIRRORBAND_PYTHON NAMES python3 REQUIRED)

file(GLOB program_sources CONFIGURE_DEPENDS ${CMAKE_SOURCE_DIR}/apps/mb-*.c)
set(program_files)
foreach(source IN LISTS program_sources)
  get_filename_component(program ${source} NAME_WE)
  list(APPEND program_files $<TARGET_FILE:${program}>)
endforeach()

function(add_structure_test name)
  add_test(NAME structure/${name}
           COMMAND ${MIRRORBAND_PYTHON} -B ${CMAKE_CURRENT_SOURCE_DIR}/structure/${name}.py ${ARGN})
endfunction()
add_structure_test(rooms_include_only_downwards)
add_structure_test(library_never_prints_or_ends)
add_structure_test(files_stay_short)
add_structure_test(functions_name_their_thread)
add_structure_test(no_paths_of_a_machine)
add_structure_test(symbols_carry_the_prefix $<TARGET_FILE:mirrorband_shared>)
add_structure_test(manual_pages_hold ${program_files})
