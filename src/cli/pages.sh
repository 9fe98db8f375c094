#!/bin/sh
# Writes the manual page and the completion for bash out of what `picket --help` says, which comes from the tables of
# commands and options: so a new one is in all three.
#   sh pages.sh TOOL man|bash > FILE
set -eu
tool=$1

help_of_all() {
  "$tool" --help
  # The options of a single command stand in its own help only.
  for command in $("$tool" --help | awk '/^Commands:/ {on = 1; next} on && NF == 0 {exit} on {print $1}'); do
    "$tool" "$command" --help | awk '/^Options of / {on = 1} on && NF == 0 {exit} on'
  done
}

man_page() {
  version=$("$tool" --version | awk '{print $2}')
  help_of_all | awk -v version="$version" '
    function safe(text) { gsub(/\\/, "\\e", text); gsub(/-/, "\\-", text); sub(/^[.\x27]/, "\\\\\\&&", text); return text }
    # An option and what it takes end at two blanks; N may stand in a column of its own.
    function entry(line,   head, rest) {
      sub(/^ +/, "", line)
      if (line ~ /^--[a-z-]+ +N /) { head = line; sub(/ .*/, " N", head); rest = line; sub(/^--[a-z-]+ +N +/, "", rest) }
      else if (match(line, /  +/)) { head = substr(line, 1, RSTART - 1); rest = substr(line, RSTART + RLENGTH) }
      else if (match(line, /^[^ ]+ [^ ]+ /)) { head = substr(line, 1, RLENGTH - 1); rest = substr(line, RLENGTH + 1) }
      else { head = line; rest = "" }
      sub(/:$/, "", head)
      print ".TP\n.B \"" safe(head) "\""
      if (rest != "") print safe(rest)
    }
    NR == 1 {
      summary = $0; sub(/^[^:]*: /, "", summary)
      print ".\\\" Written by pages.sh out of picket \\-\\-help."
      print ".TH PICKET 1 \"\" \"picket " version "\" \"User Commands\""
      print ".SH NAME\npicket \\- " safe(summary)
      print ".SH SYNOPSIS\n.B picket\n.I COMMAND\n[\\fIOPTIONS\\fR] \\fIFILE.yaml\\fR"
      print ".SH DESCRIPTION"
      print "Answers one question about one problem file; \\- in the place of the file reads standard input."
      print "Every number has an error bar."
      next
    }
    /^Usage:/ { next }
    /^Commands:/ { print ".SH COMMANDS"; part = "commands"; next }
    /^Options:/ { print ".SH OPTIONS"; part = "options"; next }
    /^Options of / { title = $0; sub(/:$/, "", title); print ".SS " safe(title); part = "options"; next }
    /^Exit status:/ { print ".SH EXIT STATUS"; sub(/^Exit status: /, ""); part = "text" }
    NF == 0 { if (part == "text") part = ""; next }
    part == "commands" { name = $1; sub(/^ *[^ ]+ +/, ""); print ".TP\n.B " safe(name) "\n" safe($0); next }
    part == "options" && /^  --/ { entry($0); next }
    part != "" { sub(/^ +/, ""); print safe($0) }
    END {
      print ".SH EXAMPLES\n.nf"
      print "picket edges bus.yaml"
      print "picket index \\-\\-set cell.pitch_nm=310 \\-\\-csv index.csv bus.yaml\n.fi"
      print ".SH SEE ALSO\nThe keys of a problem file and the C interface: the README and the headers <picket/*.h>."
    }'
}

bash_completion() {
  help_of_all | awk '
    /^Commands:/ { on = 1; next }
    on && NF == 0 { on = 0 }
    on { commands = commands " " $1; next }
    /^  --/ {
      options = options " " $1
      if ($2 ~ /^FILE/) files = files "|" $1
      else if ($2 ~ /^[A-Z]/ || $1 == "--along") values = values "|" $1
    }
    END {
      print "# Completion of picket for bash, written by pages.sh out of picket --help."
      print "_picket() {"
      print "  local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} i command="
      print "  COMPREPLY=()"
      print "  case $before in"
      print "    " substr(files, 2) ") COMPREPLY=($(compgen -f -- \"$word\")); return ;;"
      print "    " substr(values, 2) ") return ;;"
      print "  esac"
      print "  if [[ $word == -* ]]; then"
      print "    COMPREPLY=($(compgen -W \"" substr(options, 2) "\" -- \"$word\"))"
      print "    return"
      print "  fi"
      print "  for ((i = 1; i < COMP_CWORD; i++)); do"
      print "    case \" " substr(commands, 2) " \" in *\" ${COMP_WORDS[i]} \"*) command=${COMP_WORDS[i]} ;; esac"
      print "  done"
      print "  if [[ -z $command ]]; then"
      print "    COMPREPLY=($(compgen -W \"" substr(commands, 2) "\" -- \"$word\"))"
      print "  else"
      print "    COMPREPLY=($(compgen -f -X \"!*.yaml\" -- \"$word\") $(compgen -d -- \"$word\"))"
      print "  fi"
      print "}"
      print "complete -o filenames -F _picket picket"
    }'
}

case $2 in
  man) man_page ;;
  bash) bash_completion ;;
  *) echo "pages.sh: \"$2\" must be man or bash" >&2; exit 2 ;;
esac
