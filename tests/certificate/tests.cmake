# What the tests of the certificate need beside their sources: the faces, and a program that writes sample certificates.
# GPL-3.0-or-later.
foreach(program test_certificate_pdf test_certificate_memory test_certificate_years)
	if(TARGET ${program})
		target_compile_definitions(${program} PRIVATE FACES_FOLDER="${FOUNDLEFT_FACES}")
		add_dependencies(${program} foundleft_faces)
	endif()
endforeach()
failing_memory(test_certificate_memory)
failing_memory(test_certificate_years)

add_executable(make_sample_certificate ${CMAKE_CURRENT_LIST_DIR}/make_sample.c)
target_link_libraries(make_sample_certificate PRIVATE foundleft_certificate)
target_compile_definitions(make_sample_certificate PRIVATE SOURCE_DIR="${PROJECT_SOURCE_DIR}")
add_dependencies(make_sample_certificate foundleft_faces)
foundleft_script(readback certificate $<TARGET_FILE:make_sample_certificate> ${FOUNDLEFT_FACES})
