# Programs that the acceptance scripts call; the scripts are run by hand.
find_library(LIQUID_LIBRARY liquid)
if(LIQUID_LIBRARY)
  add_executable(liquid_receiver ${CMAKE_CURRENT_LIST_DIR}/liquid_receiver.c)
  target_link_libraries(liquid_receiver PRIVATE ${LIQUID_LIBRARY} PkgConfig::SNDFILE m)
endif()
