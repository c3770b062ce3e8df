# One file plays the host that is compiled with -ffast-math.
set_source_files_properties(${CMAKE_CURRENT_LIST_DIR}/fast_math_host_test.cpp PROPERTIES COMPILE_OPTIONS -ffast-math)
