# The trials are drawn in vectors of eight: worth the compiler's whole effort. Their results must not depend on the
# processor, so products are not fused with sums, whatever the C dialect. A square root never needs errno here, and
# -Wno-psabi silences a note on handing vectors to functions, which are all inlined.
set_source_files_properties(
	src/numeric/kernels_wide.c src/numeric/kernels_middle.c src/numeric/kernels_plain.c src/numeric/generator.c
	PROPERTIES COMPILE_OPTIONS "-O3;-fno-math-errno;-ffp-contract=off;-Wno-psabi")
set(THREADS_PREFER_PTHREAD_FLAG ON)
find_package(Threads REQUIRED)

# The speed of the trials beside numpy: ninja bench_monte_carlo, then tests/bench/monte_carlo.sh.
if(FOUNDLEFT_TESTS)
	add_executable(bench_monte_carlo EXCLUDE_FROM_ALL tests/bench/monte_carlo.c)
	target_link_libraries(bench_monte_carlo PRIVATE foundleft_numeric)
endif()
