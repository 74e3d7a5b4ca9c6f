# Installs the build into a folder of its own, then configures, builds and runs the outside project
# against it. The installed tree is moved first: nothing in it may remember where it was put.
set(place "${BUILD}/install test")
file(REMOVE_RECURSE "${place}")

function(run)
  execute_process(COMMAND ${ARGN} RESULT_VARIABLE code OUTPUT_VARIABLE out ERROR_VARIABLE err)
  if(NOT code EQUAL 0)
    message(FATAL_ERROR "${ARGN}\nended with ${code}\n${out}${err}")
  endif()
  set(out "${out}" PARENT_SCOPE)
endfunction()

run(${CMAKE_COMMAND} --install "${BUILD}" --config ${CONFIG} --prefix "${place}/first")
file(RENAME "${place}/first" "${place}/prefix")
run(${CMAKE_COMMAND} -S "${SOURCE}" -B "${place}/outsider" -G ${GENERATOR} -DCMAKE_BUILD_TYPE=${CONFIG}
    -DCMAKE_CXX_COMPILER=${CXX} -DCMAKE_CXX_COMPILER_LAUNCHER=${LAUNCHER} "-DCMAKE_PREFIX_PATH=${place}/prefix")
run(${CMAKE_COMMAND} --build "${place}/outsider" --config ${CONFIG})
run("${place}/outsider/outsider")

# Worked example of Reda & Andreas 2004 (NREL/TP-560-34302): topocentric zenith 50.11162 deg with
# 0.01633 deg of refraction, so 39.87205 deg of elevation without it.
string(STRIP "${out}" out)
if(NOT out STREQUAL "39.87")
  message(FATAL_ERROR "the outside program printed '${out}', not 39.87")
endif()
