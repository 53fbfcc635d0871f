"""Results to neutral blocks: headings, lines, tables, words. Every output draws from here; none computes."""
