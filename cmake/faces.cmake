# The faces of the certificate: cut from Debian's Open Sans when the program is built, so that loading and embedding
# them costs little, and nothing binary stands in the repository. GPL-3.0-or-later.
set(FOUNDLEFT_FONT_FOLDER /usr/share/fonts/truetype/open-sans CACHE PATH "Folder with OpenSans-Regular.ttf")
set(FOUNDLEFT_SRGB /usr/share/color/icc/sRGB.icc CACHE FILEPATH "sRGB colour profile (icc-profiles-free)")
find_program(FOUNDLEFT_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
find_program(FOUNDLEFT_PYTHON NAMES python3 REQUIRED)

set(face_sources ${FOUNDLEFT_FONT_FOLDER}/OpenSans-Regular.ttf ${FOUNDLEFT_FONT_FOLDER}/OpenSans-Semibold.ttf
                 ${FOUNDLEFT_SRGB})
foreach(file IN LISTS face_sources)
	if(NOT EXISTS ${file})
		message(FATAL_ERROR "${file} is missing: install fonts-open-sans, icc-profiles-free and python3-fonttools")
	endif()
endforeach()

set(FOUNDLEFT_FACES ${CMAKE_BINARY_DIR}/share/foundleft/faces)
set(face_files ${FOUNDLEFT_FACES}/regular.ttf ${FOUNDLEFT_FACES}/bold.ttf ${FOUNDLEFT_FACES}/coverage.txt
               ${FOUNDLEFT_FACES}/srgb.icc ${FOUNDLEFT_FACES}/NOTICE)
add_custom_command(
	OUTPUT ${face_files}
	COMMAND ${FOUNDLEFT_PYTHON} ${PROJECT_SOURCE_DIR}/cmake/faces.py ${face_sources} ${FOUNDLEFT_FACES}
	DEPENDS ${PROJECT_SOURCE_DIR}/cmake/faces.py ${face_sources}
	COMMENT "Cutting the faces of the certificate")
add_custom_target(foundleft_faces ALL DEPENDS ${face_files})
install(DIRECTORY ${FOUNDLEFT_FACES} DESTINATION ${CMAKE_INSTALL_DATADIR}/foundleft)
