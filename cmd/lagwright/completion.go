package main

import "github.com/spf13/cobra"

func newCompletion(c *console) *cobra.Command {
	return &cobra.Command{
		Use:   "completion bash|zsh|fish|powershell",
		Short: "Completion script for a shell",
		Long: `Prints a script that completes commands, flags and their words.

  bash        source <(lagwright completion bash)
  zsh         lagwright completion zsh > "${fpath[1]}/_lagwright"
  fish        lagwright completion fish > ~/.config/fish/completions/lagwright.fish
  powershell  lagwright completion powershell | Out-String | Invoke-Expression`,
		Example:   "  lagwright completion bash > /etc/bash_completion.d/lagwright",
		ValidArgs: []string{"bash", "zsh", "fish", "powershell"},
		Args:      cobra.MatchAll(needArgs(1, 1, "lagwright completion bash"), cobra.OnlyValidArgs),
		RunE: func(cmd *cobra.Command, args []string) error {
			root := cmd.Root()
			switch args[0] {
			case "bash":
				return root.GenBashCompletionV2(c.out, true)
			case "zsh":
				return root.GenZshCompletion(c.out)
			case "fish":
				return root.GenFishCompletion(c.out, true)
			}
			return root.GenPowerShellCompletionWithDesc(c.out)
		},
	}
}
