/** The shells that can complete `refettle`. */
export type Shell = 'bash' | 'zsh' | 'fish';

/** What runs in the shell is short: it hands the line to `refettle __complete` and offers what comes back. Nothing of the line is run. */
export const SHELL_SCRIPTS: Readonly<Record<Shell, string>> = {
  // Needs bash 4.4 (compopt -o nosort) and nothing else.
  bash: `# Completion of refettle for bash. In ~/.bashrc:  source <(refettle completion bash)
_refettle() {
  local -a answer=()
  mapfile -t answer < <(refettle __complete bash -- "$COMP_LINE" "$COMP_POINT" "$COMP_TYPE" "$COMP_WORDBREAKS" 2>/dev/null)
  COMPREPLY=("\${answer[@]}")
  compopt -o nosort 2>/dev/null
  if [[ \${#COMPREPLY[@]} -eq 1 && \${COMPREPLY[0]} == */ ]]; then compopt -o nospace 2>/dev/null; fi
}
complete -F _refettle refettle
`,
  zsh: `#compdef refettle
# Completion of refettle for zsh. In ~/.zshrc, behind compinit:  source <(refettle completion zsh)
_refettle() {
  local value about
  local -a values shown folders
  while IFS=$'\\t' read -r value about; do
    if [[ $value == */ ]]; then
      folders+=("$value")
    else
      values+=("$value")
      shown+=("$value\${about:+  -- $about}")
    fi
  done < <(refettle __complete zsh -- "\${(@)words[2,CURRENT-1]}" "$PREFIX" 2>/dev/null)
  local one_a_line=(-l)
  [[ "\${shown[*]}" == *'  -- '* ]] || one_a_line=()
  (( \${#values} )) && compadd -Q -V refettle $one_a_line -d shown -a values
  (( \${#folders} )) && compadd -Q -V refettle-folders -S '' -a folders
  return 0
}
if [[ \${funcstack[1]} == _refettle ]]; then
  _refettle "$@"
else
  compdef _refettle refettle
fi
`,
  fish: `# Completion of refettle for fish:  refettle completion fish > ~/.config/fish/completions/refettle.fish
function __refettle_complete
  set -l before (commandline -opc)
  set -l typed (commandline -ct)
  refettle __complete fish -- $before[2..-1] "$typed" 2>/dev/null
end
complete -c refettle -f -k -a '(__refettle_complete)'
`,
};
