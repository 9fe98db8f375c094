# What is installed where, in four components that are also the Debian packages: library, development, tool, python
# (the last two where they are built). Everything is found by relative paths, so an installation can be moved.
include(CMakePackageConfigHelpers)

install(TARGETS picket
  LIBRARY DESTINATION ${CMAKE_INSTALL_LIBDIR} COMPONENT library NAMELINK_COMPONENT development)
install(TARGETS picket_static ARCHIVE DESTINATION ${CMAKE_INSTALL_LIBDIR} COMPONENT development)
install(DIRECTORY ${CMAKE_SOURCE_DIR}/include/ DESTINATION ${CMAKE_INSTALL_INCLUDEDIR} COMPONENT development)
install(FILES ${CMAKE_SOURCE_DIR}/LICENSE DESTINATION ${CMAKE_INSTALL_DOCDIR} COMPONENT library)

# From the folder of picket.pc to the prefix.
file(RELATIVE_PATH PICKET_PREFIX_OF_PC /prefix/${CMAKE_INSTALL_LIBDIR}/pkgconfig /prefix)
configure_file(${CMAKE_SOURCE_DIR}/src/picket.pc.in ${CMAKE_BINARY_DIR}/picket.pc @ONLY)
install(FILES ${CMAKE_BINARY_DIR}/picket.pc DESTINATION ${CMAKE_INSTALL_LIBDIR}/pkgconfig COMPONENT development)

set(PICKET_CMAKE_DIR ${CMAKE_INSTALL_LIBDIR}/cmake/picket)
configure_package_config_file(${CMAKE_SOURCE_DIR}/src/picketConfig.cmake.in ${CMAKE_BINARY_DIR}/picketConfig.cmake
  INSTALL_DESTINATION ${PICKET_CMAKE_DIR} PATH_VARS CMAKE_INSTALL_INCLUDEDIR CMAKE_INSTALL_LIBDIR)
write_basic_package_version_file(${CMAKE_BINARY_DIR}/picketConfigVersion.cmake COMPATIBILITY SameMinorVersion)
install(FILES ${CMAKE_BINARY_DIR}/picketConfig.cmake ${CMAKE_BINARY_DIR}/picketConfigVersion.cmake
  DESTINATION ${PICKET_CMAKE_DIR} COMPONENT development)

# `cmake --build build --target uninstall` takes away what the last `cmake --install build` put down.
add_custom_target(uninstall
  COMMAND ${CMAKE_COMMAND} -DMANIFEST=${CMAKE_BINARY_DIR}/install_manifest.txt -P ${CMAKE_SOURCE_DIR}/src/uninstall.cmake
  VERBATIM)

# `cpack -G DEB` in the build folder makes the packages. Their names follow Debian: libpicket0 can lie beside a later
# libpicket1.
set(CPACK_PACKAGE_NAME picket)
set(CPACK_PACKAGE_VENDOR picket)
set(CPACK_PACKAGE_CONTACT "the maintainers of Picket <maintainers@picket.invalid>")
set(CPACK_PACKAGE_DESCRIPTION_SUMMARY "modes and band edges of segmented optical waveguides")
set(CPACK_GENERATOR DEB)
set(CPACK_PACKAGING_INSTALL_PREFIX /usr)
set(CPACK_COMPONENTS_ALL library development)
set(CPACK_DEB_COMPONENT_INSTALL ON)
set(CPACK_STRIP_FILES ON)
set(CPACK_DEBIAN_PACKAGE_RELEASE 1)
set(CPACK_DEBIAN_PACKAGE_SECTION science)
set(CPACK_DEBIAN_FILE_NAME DEB-DEFAULT)
set(same "(= ${PROJECT_VERSION}-${CPACK_DEBIAN_PACKAGE_RELEASE})")

set(CPACK_DEBIAN_LIBRARY_PACKAGE_NAME libpicket${PICKET_ABI})
set(CPACK_DEBIAN_LIBRARY_PACKAGE_SECTION libs)
set(CPACK_DEBIAN_LIBRARY_PACKAGE_SHLIBDEPS ON)
set(CPACK_DEBIAN_LIBRARY_PACKAGE_CONTROL_EXTRA ${CMAKE_BINARY_DIR}/triggers)
file(WRITE ${CMAKE_BINARY_DIR}/triggers "activate-noawait ldconfig\n")
set(CPACK_COMPONENT_LIBRARY_DESCRIPTION "Shared library.")

set(CPACK_DEBIAN_DEVELOPMENT_PACKAGE_NAME libpicket-dev)
set(CPACK_DEBIAN_DEVELOPMENT_PACKAGE_SECTION libdevel)
set(CPACK_DEBIAN_DEVELOPMENT_PACKAGE_DEPENDS "libpicket${PICKET_ABI} ${same}, libsuitesparse-dev, libarpack2-dev, libopenblas-dev, libyaml-dev, libjansson-dev, libhdf5-dev")
set(CPACK_COMPONENT_DEVELOPMENT_DESCRIPTION "Headers, static library, and files for pkg-config and CMake.")

if(TARGET picket_tool)
  list(APPEND CPACK_COMPONENTS_ALL tool)
  set(CPACK_DEBIAN_TOOL_PACKAGE_NAME picket)
  set(CPACK_DEBIAN_TOOL_PACKAGE_DEPENDS "libpicket${PICKET_ABI} ${same}, libc6")
  set(CPACK_COMPONENT_TOOL_DESCRIPTION "Command-line tool with its manual page and completion.")
endif()
