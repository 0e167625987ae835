# wavefount_add_plugin(NAME file...): a plug-in NAME.so with steps of one's own, to be put into a
# folder given to `wavefount --plugins`.
function(wavefount_add_plugin name)
  add_library(${name} MODULE ${ARGN})
  target_link_libraries(${name} PRIVATE wavefount::core)
  target_compile_features(${name} PRIVATE cxx_std_20)
  set_target_properties(${name} PROPERTIES
    PREFIX "" CXX_VISIBILITY_PRESET hidden VISIBILITY_INLINES_HIDDEN ON)
endfunction()
