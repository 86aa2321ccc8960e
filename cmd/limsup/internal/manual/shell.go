package manual

import (
	"fmt"
	"strings"
)

// Shells are the names that Completion knows.
func Shells() []string { return []string{"bash", "zsh", "fish"} }

// Completion is a script that completes command lines of the program in a shell; ok is false for an unknown one.
// The words are written out in the script: completing starts no program.
func (p *Program) Completion(shell string) (script string, ok bool) {
	switch shell {
	case "bash":
		return p.bash(), true
	case "zsh":
		return p.zsh(), true
	case "fish":
		return p.fish(), true
	}
	return "", false
}

// quote writes a word for a POSIX shell.
func quote(s string) string { return `'` + strings.ReplaceAll(s, `'`, `'\''`) + `'` }

// quoteAll writes words for a POSIX shell.
func quoteAll(words []string) string {
	q := make([]string, len(words))
	for i, w := range words {
		q[i] = quote(w)
	}
	return strings.Join(q, " ")
}

// valueFlags are the flags with values of all commands, each once, in the order in which they first occur.
func (p *Program) valueFlags() []Flag {
	var out []Flag
	seen := map[string]bool{}
	for _, c := range p.Commands {
		for _, f := range c.flags() {
			if f.Value != "" && !seen[f.Name] {
				seen[f.Name] = true
				out = append(out, f)
			}
		}
	}
	return out
}

func flagNames(flags []Flag) []string {
	var out []string
	for _, f := range flags {
		out = append(out, "--"+f.Name)
	}
	return out
}

// pattern is an alternative of a case in bash and zsh.
func pattern(names []string) string { return strings.Join(names, "|") }

// valued is the pattern of all flags with values.
func (p *Program) valued() string { return pattern(flagNames(p.valueFlags())) }

// findCommand is code for bash and zsh: it sets command to the first word that is neither a flag nor the value of
// one. Words are counted from first to before end.
func (p *Program) findCommand(array, first, end string) string {
	return fmt.Sprintf(`    for ((i = %s; i < %s; i++)); do
        case "${%s[i]}" in
            %s) ((i++)) ;;
            -*|=) ;;
            *) command="${%s[i]}"; break ;;
        esac
    done
`, first, end, array, p.valued(), array)
}

// bash takes apart --flag=value, which that shell splits into three words.
func (p *Program) bash() string {
	var b strings.Builder
	f := func(format string, args ...any) { fmt.Fprintf(&b, format, args...) }
	f("# Completion of %[1]s for bash. Use: source <(%[1]s completion bash)\n\n", p.Name)
	f("_%s_choose() {\n    local word\n    COMPREPLY=()\n    for word in \"${@:2}\"; do\n        [[ $word == \"$1\"* ]] && COMPREPLY+=(\"$word\")\n    done\n}\n\n", p.Name)
	f("_%s() {\n    local current=\"${COMP_WORDS[COMP_CWORD]}\" previous=\"\" command=\"\" i\n", p.Name)
	f("    COMPREPLY=()\n")
	f("    ((COMP_CWORD > 0)) && previous=\"${COMP_WORDS[COMP_CWORD-1]}\"\n")
	f("    if [[ $previous == = ]] && ((COMP_CWORD > 1)); then\n        previous=\"${COMP_WORDS[COMP_CWORD-2]}\"\n    elif [[ $current == = ]]; then\n        current=\"\"\n    fi\n")
	f("%s", p.findCommand("COMP_WORDS", "1", "COMP_CWORD"))
	f("    case \"$previous\" in\n")
	for _, fl := range p.valueFlags() {
		switch {
		case fl.Words != nil:
			f("        --%s) _%s_choose \"$current\" %s; return ;;\n", fl.Name, p.Name, quoteAll(fl.Words))
		case fl.File:
			f("        --%s) return ;;\n", fl.Name) // the shell's own completion of files follows
		}
	}
	f("        %s) compopt +o default 2>/dev/null; return ;;\n    esac\n", p.valued())
	f("    if [[ $current == -* ]]; then\n        case \"$command\" in\n")
	for _, c := range p.Commands {
		f("            %s) _%s_choose \"$current\" %s ;;\n", c.Name, p.Name, quoteAll(flagNames(c.flags())))
	}
	f("            *) _%s_choose \"$current\" --help --version ;;\n        esac\n        return\n    fi\n", p.Name)
	f("    compopt +o default 2>/dev/null\n    case \"$command\" in\n        '') _%s_choose \"$current\" %s ;;\n", p.Name, quoteAll(p.names()))
	for _, c := range p.Commands {
		if c.Words != nil {
			f("        %s) _%s_choose \"$current\" %s ;;\n", c.Name, p.Name, quoteAll(c.Words))
		}
	}
	f("    esac\n}\n\ncomplete -o default -F _%[1]s %[1]s\n", p.Name)
	return b.String()
}

func (p *Program) zsh() string {
	var b strings.Builder
	f := func(format string, args ...any) { fmt.Fprintf(&b, format, args...) }
	f("#compdef %[1]s\n# Completion of %[1]s for zsh. Use: source <(%[1]s completion zsh), or put it as _%[1]s in a folder of fpath.\n\n", p.Name)
	f("_%s() {\n    local current=\"${words[CURRENT]}\" previous=\"${words[CURRENT-1]}\" command=\"\" i\n    local -a entries\n", p.Name)
	f("    if [[ $current == --*=* ]]; then\n        previous=\"${current%%%%=*}\"\n        compset -P '*='\n        current=\"${current#*=}\"\n    fi\n")
	f("%s", p.findCommand("words", "2", "CURRENT"))
	f("    case \"$previous\" in\n")
	for _, fl := range p.valueFlags() {
		switch {
		case fl.Words != nil:
			f("        --%s) compadd -- %s; return ;;\n", fl.Name, quoteAll(fl.Words))
		case fl.File:
			f("        --%s) _files; return ;;\n", fl.Name)
		}
	}
	f("        %s) return ;;\n    esac\n", p.valued())
	described := func(list []Entry) string {
		var out []string
		for _, e := range list {
			out = append(out, quote(strings.ReplaceAll(e.Name, ":", `\:`)+":"+e.Text))
		}
		return strings.Join(out, " ")
	}
	f("    if [[ $current == -* ]]; then\n        case \"$command\" in\n")
	for _, c := range p.Commands {
		f("            %s) entries=(%s) ;;\n", c.Name, described(flagEntries(c.flags())))
	}
	f("            *) entries=(%s) ;;\n        esac\n        _describe -o flag entries\n        return\n    fi\n", described([]Entry{{"--help", "what there is"}, {"--version", "the version"}}))
	f("    case \"$command\" in\n        '') entries=(%s); _describe command entries ;;\n", described(commandEntries(p.Commands)))
	for _, c := range p.Commands {
		if c.Words != nil {
			f("        %s) compadd -- %s ;;\n", c.Name, quoteAll(c.Words))
		}
	}
	f("    esac\n}\n\nif [[ ${funcstack[1]} == _%[1]s ]]; then\n    _%[1]s \"$@\"\nelse\n    compdef _%[1]s %[1]s\nfi\n", p.Name)
	return b.String()
}

// brief shortens a usage to its first part, for a list.
func brief(s string) string {
	for _, end := range []string{" (", ": ", "; ", ". "} {
		s, _, _ = strings.Cut(s, end)
	}
	return s
}

func flagEntries(flags []Flag) []Entry {
	var out []Entry
	for _, f := range flags {
		out = append(out, Entry{"--" + f.Name, brief(f.Usage)})
	}
	return out
}

func commandEntries(commands []*Command) []Entry {
	var out []Entry
	for _, c := range commands {
		out = append(out, Entry{c.Name, brief(c.Usage)})
	}
	return out
}

func (p *Program) fish() string {
	var b strings.Builder
	f := func(format string, args ...any) { fmt.Fprintf(&b, format, args...) }
	// In fish only the backslash and the apostrophe are special between apostrophes.
	q := func(s string) string { return `'` + strings.NewReplacer(`\`, `\\`, `'`, `\'`).Replace(s) + `'` }
	f("# Completion of %[1]s for fish. Use: %[1]s completion fish | source\n\n", p.Name)
	f("complete -c %s -f\n", p.Name)
	none := "not __fish_seen_subcommand_from " + strings.Join(p.names(), " ")
	f("complete -c %s -n %s -l help -d %s\n", p.Name, q(none), q("what there is"))
	f("complete -c %s -n %s -l version -d %s\n", p.Name, q(none), q("the version"))
	for _, c := range p.Commands {
		f("\ncomplete -c %s -n %s -a %s -d %s\n", p.Name, q(none), c.Name, q(brief(c.Usage)))
		here := q("__fish_seen_subcommand_from " + c.Name)
		if c.Words != nil {
			f("complete -c %s -n %s -a %s\n", p.Name, here, q(strings.Join(c.Words, " ")))
		}
		for _, fl := range c.flags() {
			f("complete -c %s -n %s -l %s -d %s", p.Name, here, fl.Name, q(brief(fl.Usage)))
			switch {
			case fl.Words != nil:
				f(" -x -a %s", q(strings.Join(fl.Words, " ")))
			case fl.File:
				f(" -r -F")
			case fl.Value != "":
				f(" -x")
			}
			f("\n")
		}
	}
	return b.String()
}
