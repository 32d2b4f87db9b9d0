# These tests are of the code that the programs share.
foreach(test IN ITEMS parse json progress)
  target_link_libraries(apps_common_test_${test} PRIVATE app_common)
endforeach()
