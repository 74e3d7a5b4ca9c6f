# Turns data files into one C++ source, so that the program carries its tables with it:
# cmake -DOUT=embedded.cpp -DFILES="a.csv;b.csv" [-DNAME=embedded_files] -P embed.cmake
# NAME.hpp declares the function NAME (without it: embedded.hpp, embedded_files).
set(header embedded.hpp)
set(function embedded_files)
if(DEFINED NAME)
  set(header ${NAME}.hpp)
  set(function ${NAME})
endif()
set(code "// Made by embed.cmake from files in a data folder; edit those.\n")
string(APPEND code "#include \"${header}\"\n\nnamespace sunbudget {\n\n")
string(APPEND code "std::span<const EmbeddedFile> ${function}() noexcept {\n")
string(APPEND code "    static constexpr EmbeddedFile files[] = {\n")
foreach(file IN LISTS FILES)
  get_filename_component(name ${file} NAME)
  file(READ ${file} text)
  # A raw string holds every byte but its own end mark.
  if(text MATCHES "\\)data\"")
    message(FATAL_ERROR "${file} holds )data\", the end mark of the string it would become")
  endif()
  string(APPEND code "        {\"${name}\", R\"data(${text})data\"},\n")
endforeach()
string(APPEND code "    };\n    return files;\n}\n\n}  // namespace sunbudget\n")
file(WRITE ${OUT} "${code}")
