# What every target of the project is built with.
if(NOT CMAKE_BUILD_TYPE AND NOT CMAKE_CONFIGURATION_TYPES)
    set(CMAKE_BUILD_TYPE Release CACHE STRING "Build type" FORCE)
endif()
set(CMAKE_CXX_STANDARD 20)
set(CMAKE_CXX_STANDARD_REQUIRED ON)
set(CMAKE_CXX_EXTENSIONS OFF)
# Static libraries and embedded files end up in shared plug-ins.
set(CMAKE_POSITION_INDEPENDENT_CODE ON)
set(CMAKE_EXPORT_COMPILE_COMMANDS ON)

find_program(CCACHE_PROGRAM ccache)
if(CCACHE_PROGRAM AND NOT CMAKE_CXX_COMPILER_LAUNCHER)
    set(CMAKE_C_COMPILER_LAUNCHER ${CCACHE_PROGRAM})
    set(CMAKE_CXX_COMPILER_LAUNCHER ${CCACHE_PROGRAM})
endif()

# Options for this project's own code; third-party modules are compiled without them.
# No -ffast-math: it breaks NaN checks and a shared library linked with it changes its host's rounding mode.
# Contraction is off so that results do not depend on where the compiler finds a multiply beside an add.
add_library(hitchpin_options INTERFACE)
add_library(Hitchpin::options ALIAS hitchpin_options)
target_compile_options(hitchpin_options INTERFACE
    -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wno-sign-conversion -ffp-contract=off
    $<$<BOOL:${HITCHPIN_WARNINGS_AS_ERRORS}>:-Werror>)

if(HITCHPIN_SANITIZE)
    add_compile_options(-fsanitize=${HITCHPIN_SANITIZE} -fno-omit-frame-pointer -g)
    add_link_options(-fsanitize=${HITCHPIN_SANITIZE})
endif()
