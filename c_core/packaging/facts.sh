# What the manifests say of the core, in one place. The release stands in include/magnav_core.h.
name=magnav_core
sentence="The Earth's main magnetic field and a heading from it."
paragraph="Declination and the other elements at a place and date from \
Gauss coefficients; tilt-compensated magnetic, true and grid headings with their standard uncertainty and \
warnings. No heap, no globals; the same bits on every target. Never the only means of safety-critical navigation."
maintainer="the magnav maintainers"
mail="magnav@example.org"
url="https://example.org/magnav"
licence=MIT
