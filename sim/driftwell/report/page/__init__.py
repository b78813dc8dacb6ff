"""What every HTML report is made with: markup, sections, tables, style, the document itself."""
