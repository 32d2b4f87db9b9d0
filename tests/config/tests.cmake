# The manual page of the config file is made from the table of keys: the target man-page writes it anew, the
# test config/test_help holds the committed one against the table.
add_executable(config_man_page ${CMAKE_CURRENT_SOURCE_DIR}/config/man_page.c)
target_link_libraries(config_man_page PRIVATE mirrorband_static mirrorband_options)
add_custom_target(man-page COMMAND config_man_page ${CMAKE_SOURCE_DIR}/docs/man/mirrorband.5)
