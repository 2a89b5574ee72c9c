# SPDX-License-Identifier: MIT
# cmake -DFILES=a|b|... -DOUT=page_files.cpp -P embed.cmake
# Writes the files, byte for byte, into one source file (page_file.hpp). Same files, same text.
string(REPLACE "|" ";" files "${FILES}")
list(SORT files COMPARE FILE_BASENAME)

set(arrays "")
set(table "")
set(number 0)
foreach(path IN LISTS files)
  get_filename_component(name ${path} NAME)
  get_filename_component(ending ${path} LAST_EXT)
  if(ending STREQUAL ".html")
    set(type "text/html; charset=utf-8")
  elseif(ending STREQUAL ".css")
    set(type "text/css; charset=utf-8")
  elseif(ending STREQUAL ".js")
    set(type "text/javascript; charset=utf-8")
  else()
    message(FATAL_ERROR "${path}: no media type is known for ${ending}")
  endif()
  file(READ ${path} bytes HEX)
  string(LENGTH "${bytes}" digits)
  math(EXPR size "${digits} / 2")
  string(REGEX REPLACE "(................................)" "\\1\n" bytes "${bytes}")
  string(REGEX REPLACE "([0-9a-f][0-9a-f])" "0x\\1," bytes "${bytes}")
  string(APPEND arrays "constexpr unsigned char kFile${number}[] = {\n${bytes}0};\n")
  string(APPEND table "    {\"${name}\", \"${type}\", text(kFile${number}, ${size})},\n")
  math(EXPR number "${number} + 1")
endforeach()

file(WRITE ${OUT}.part "// Made by estimator/wall/embed.cmake.
#include \"estimator/wall/page_file.hpp\"

#include <array>

namespace holdfast::wall {
namespace {

${arrays}
std::string_view text(const unsigned char* bytes, std::size_t size) {
    return {reinterpret_cast<const char*>(bytes), size};
}

}  // namespace

std::span<const PageFile> page_files() {
    static const std::array<PageFile, ${number}> kFiles{{
${table}    }};
    return kFiles;
}

}  // namespace holdfast::wall
")
file(RENAME ${OUT}.part ${OUT})
