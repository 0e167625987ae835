# A module is a static library of plain functions and classes, wavefount::NAME, and, where it names
# steps, a plug-in lib/wavefount/plugins/wavefount-NAME.so that registers them.

# wavefount_add_module(NAME SOURCES file... [PLUGIN file...] [LINK public-target...]
#                      [LINK_PRIVATE target...])
function(wavefount_add_module name)
  cmake_parse_arguments(MODULE "" "" "SOURCES;PLUGIN;LINK;LINK_PRIVATE" ${ARGN})
  add_library(wavefount_${name} STATIC ${MODULE_SOURCES})
  add_library(wavefount::${name} ALIAS wavefount_${name})
  target_include_directories(wavefount_${name} PUBLIC ${CMAKE_CURRENT_SOURCE_DIR}/include)
  target_link_libraries(wavefount_${name}
    PUBLIC wavefount::core ${MODULE_LINK}
    PRIVATE ${MODULE_LINK_PRIVATE} wavefount_warnings)
  if(MODULE_PLUGIN)
    add_library(wavefount-${name} MODULE ${MODULE_PLUGIN})
    target_link_libraries(wavefount-${name} PRIVATE wavefount_${name} wavefount_warnings)
    set_target_properties(wavefount-${name} PROPERTIES
      PREFIX "" CXX_VISIBILITY_PRESET hidden VISIBILITY_INLINES_HIDDEN ON
      LIBRARY_OUTPUT_DIRECTORY ${CMAKE_BINARY_DIR}/lib/wavefount/plugins
      INSTALL_RPATH "$ORIGIN/../..")
    install(TARGETS wavefount-${name}
      LIBRARY DESTINATION ${CMAKE_INSTALL_LIBDIR}/wavefount/plugins)
  endif()
endfunction()

# wavefount_add_test(NAME SOURCES file... [LINK target...]): a GoogleTest program whose cases CTest
# lists one by one.
function(wavefount_add_test name)
  cmake_parse_arguments(TEST "" "" "SOURCES;LINK" ${ARGN})
  add_executable(${name} ${TEST_SOURCES})
  target_link_libraries(${name} PRIVATE ${TEST_LINK} GTest::gtest GTest::gtest_main wavefount_warnings)
  gtest_discover_tests(${name} DISCOVERY_TIMEOUT 60)
endfunction()
