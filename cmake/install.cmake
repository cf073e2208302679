# What `cmake --install` puts in place, the same tree beside the program for use without installing, and the .deb.

# The build tree has share/foundleft like the installed one: the program finds its data beside itself.
file(GLOB templates CONFIGURE_DEPENDS ${PROJECT_SOURCE_DIR}/templates/*.yaml)
set(staged "")
foreach(template IN LISTS templates)
	get_filename_component(name ${template} NAME)
	set(copy ${CMAKE_BINARY_DIR}/share/foundleft/templates/${name})
	add_custom_command(OUTPUT ${copy} COMMAND ${CMAKE_COMMAND} -E copy ${template} ${copy} DEPENDS ${template})
	list(APPEND staged ${copy})
endforeach()
add_custom_target(foundleft_templates ALL DEPENDS ${staged})

install(TARGETS foundleft RUNTIME DESTINATION ${CMAKE_INSTALL_BINDIR})
install(FILES ${templates} DESTINATION ${CMAKE_INSTALL_DATADIR}/foundleft/templates)
install(FILES src/cli/foundleft.1 DESTINATION ${CMAKE_INSTALL_MANDIR}/man1)
install(FILES src/cli/completion.bash DESTINATION ${CMAKE_INSTALL_DATADIR}/bash-completion/completions
        RENAME foundleft)
install(FILES README.md LICENSE DESTINATION ${CMAKE_INSTALL_DOCDIR})
install(DIRECTORY docs/ DESTINATION ${CMAKE_INSTALL_DOCDIR}/manual FILES_MATCHING PATTERN "*.md")

set(CPACK_GENERATOR DEB)
set(CPACK_PACKAGE_NAME foundleft)
set(CPACK_PACKAGE_CONTACT "the foundleft developers <foundleft@example.invalid>")
set(CPACK_PACKAGE_DESCRIPTION_SUMMARY ${PROJECT_DESCRIPTION})
set(CPACK_DEBIAN_FILE_NAME DEB-DEFAULT)
set(CPACK_DEBIAN_PACKAGE_SHLIBDEPS ON)
set(CPACK_DEBIAN_PACKAGE_SECTION science)
set(CPACK_STRIP_FILES ON)
include(CPack)
