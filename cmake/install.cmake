# Installed packages need neither Eigen nor Boost: both are private to the compiled library.
include(CMakePackageConfigHelpers)

install(TARGETS tauwright tauwright_run EXPORT tauwright_targets
  ARCHIVE DESTINATION ${CMAKE_INSTALL_LIBDIR})
install(DIRECTORY include/tauwright DESTINATION ${CMAKE_INSTALL_INCLUDEDIR} FILES_MATCHING PATTERN "*.hpp" PATTERN "*.def")
if(TAUWRIGHT_C)
  install(TARGETS tauwright_c EXPORT tauwright_targets LIBRARY DESTINATION ${CMAKE_INSTALL_LIBDIR}
    RUNTIME DESTINATION ${CMAKE_INSTALL_BINDIR})
  install(DIRECTORY capi/include/tauwright DESTINATION ${CMAKE_INSTALL_INCLUDEDIR} FILES_MATCHING PATTERN "*.h")
endif()
install(FILES src/tune/tuning_sheet.schema.json LICENSE DESTINATION ${CMAKE_INSTALL_DATADIR}/tauwright)

install(EXPORT tauwright_targets NAMESPACE tauwright:: FILE tauwright-targets.cmake
  DESTINATION ${CMAKE_INSTALL_LIBDIR}/cmake/tauwright)
configure_package_config_file(cmake/tauwright-config.cmake.in ${CMAKE_CURRENT_BINARY_DIR}/tauwright-config.cmake
  INSTALL_DESTINATION ${CMAKE_INSTALL_LIBDIR}/cmake/tauwright)
# In 0.x every minor version may break.
write_basic_package_version_file(${CMAKE_CURRENT_BINARY_DIR}/tauwright-config-version.cmake
  COMPATIBILITY SameMinorVersion)
install(FILES ${CMAKE_CURRENT_BINARY_DIR}/tauwright-config.cmake ${CMAKE_CURRENT_BINARY_DIR}/tauwright-config-version.cmake
  DESTINATION ${CMAKE_INSTALL_LIBDIR}/cmake/tauwright)

# pkg-config, relative to where the file lies, so that the tree may be moved, with the thread library
# that the static library needs.
find_package(Threads REQUIRED)
file(RELATIVE_PATH tauwright_prefix_from_pc "${CMAKE_INSTALL_FULL_LIBDIR}/pkgconfig" "${CMAKE_INSTALL_PREFIX}")
foreach(name tauwright tauwright-c)
  if(name STREQUAL "tauwright-c" AND NOT TAUWRIGHT_C)
    continue()
  endif()
  configure_file(cmake/${name}.pc.in ${CMAKE_CURRENT_BINARY_DIR}/${name}.pc @ONLY)
  install(FILES ${CMAKE_CURRENT_BINARY_DIR}/${name}.pc DESTINATION ${CMAKE_INSTALL_LIBDIR}/pkgconfig)
endforeach()
