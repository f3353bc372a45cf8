# Writes a C++ source that holds the page's HTML, CSS and JavaScript as text.
# cmake -DFOLDER=.../report/page -DOUTPUT=....cpp "-DSCRIPTS=a.js;b.js" -P embed_page.cmake
function(text_of variable)
  set(result "")
  foreach(name IN LISTS ARGN)
    file(READ ${FOLDER}/${name} content)
    # A string literal may be limited in length; several in a row are joined by the compiler.
    string(LENGTH "${content}" length)
    set(from 0)
    while(from LESS length)
      string(SUBSTRING "${content}" ${from} 8000 chunk)
      string(APPEND result "R\"~page~(${chunk})~page~\"\n")
      math(EXPR from "${from} + 8000")
    endwhile()
  endforeach()
  set(${variable} "${result}" PARENT_SCOPE)
endfunction()

text_of(html page.html)
text_of(css page.css)
text_of(js ${SCRIPTS})
file(WRITE ${OUTPUT}
     "#include \"report/page_sources.h\"\n\nnamespace thirdrung {\n\nPageSources page_sources() {\n  return {\n${html},\n${css},\n${js}};\n}\n\n}  // namespace thirdrung\n")
