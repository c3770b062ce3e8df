# The real-time floor in firmware: compiled without exceptions and RTTI, and asked afterwards which
# symbols it still needs.
add_library(run_alone_object OBJECT ${CMAKE_CURRENT_LIST_DIR}/run_without_runtime.cpp)
target_link_libraries(run_alone_object PRIVATE tauwright_run)
target_compile_options(run_alone_object PRIVATE -O2 -fno-exceptions -fno-rtti -Wall -Wextra -Werror)
add_test(NAME run_alone COMMAND sh ${CMAKE_CURRENT_LIST_DIR}/check_symbols.sh ${CMAKE_NM} $<TARGET_OBJECTS:run_alone_object>)
