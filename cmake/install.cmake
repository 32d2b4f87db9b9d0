# Headers, pkg-config file, CMake package, manual pages.
install(DIRECTORY lib/include/mirrorband DESTINATION ${CMAKE_INSTALL_INCLUDEDIR} FILES_MATCHING PATTERN "*.h")

configure_file(cmake/mirrorband.pc.in mirrorband.pc @ONLY)
install(FILES ${CMAKE_CURRENT_BINARY_DIR}/mirrorband.pc DESTINATION ${CMAKE_INSTALL_LIBDIR}/pkgconfig)

include(CMakePackageConfigHelpers)
set(MIRRORBAND_CMAKE_DIR ${CMAKE_INSTALL_LIBDIR}/cmake/mirrorband)
configure_package_config_file(cmake/mirrorband-config.cmake.in mirrorband-config.cmake
  INSTALL_DESTINATION ${MIRRORBAND_CMAKE_DIR} PATH_VARS CMAKE_INSTALL_INCLUDEDIR CMAKE_INSTALL_LIBDIR)
write_basic_package_version_file(mirrorband-config-version.cmake COMPATIBILITY SameMinorVersion)
install(FILES ${CMAKE_CURRENT_BINARY_DIR}/mirrorband-config.cmake
              ${CMAKE_CURRENT_BINARY_DIR}/mirrorband-config-version.cmake DESTINATION ${MIRRORBAND_CMAKE_DIR})

foreach(section IN ITEMS 1 5)
  file(GLOB pages CONFIGURE_DEPENDS docs/man/*.${section})
  install(FILES ${pages} DESTINATION ${CMAKE_INSTALL_MANDIR}/man${section})
endforeach()
