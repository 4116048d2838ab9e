# Set-up that the project's scripts share: packages, the compiler cache, and the build folder. To be sourced from the
# top folder.
bash Source/packages.sh
# The compiler cache lies outside the project and serves every checkout of it, wherever that stands.
export CCACHE_BASEDIR=$PWD CCACHE_NOHASHDIR=true
# What precompiled headers need.
export CCACHE_SLOPPINESS=pch_defines,time_macros
echo "Configuring and building (the first time takes some minutes) ..."
cmake --preset release >build-configure.log 2>&1 || { cat build-configure.log >&2; exit 1; }
mv build-configure.log build/configure.log
