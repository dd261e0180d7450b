//! Colour for a terminal, none elsewhere.

/// Puts lines into colour, or leaves them as they are.
#[derive(Clone, Copy, Debug)]
pub(super) struct Paint {
    pub(super) on: bool,
}

impl Paint {
    /// What asks for attention.
    pub(super) fn alarm(self, text: &str) -> String {
        self.put("31", text)
    }

    /// What the eye looks for.
    pub(super) fn heading(self, text: &str) -> String {
        self.put("1", text)
    }

    /// Every line between the codes that begin and end a rendition (ECMA-48, SGR); line ends stay outside.
    fn put(self, rendition: &str, text: &str) -> String {
        if !self.on {
            return text.to_owned();
        }
        let line = |line: &str| match line.strip_suffix('\n') {
            Some(line) => format!("\x1b[{rendition}m{line}\x1b[0m\n"),
            None => format!("\x1b[{rendition}m{line}\x1b[0m"),
        };
        text.split_inclusive('\n').map(line).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn colour_is_put_around_lines_or_not_at_all() {
        assert_eq!(Paint { on: false }.alarm("FT-1\nFT-2\n"), "FT-1\nFT-2\n");
        assert_eq!(Paint { on: true }.alarm("FT-1\nFT-2"), "\x1b[31mFT-1\x1b[0m\n\x1b[31mFT-2\x1b[0m");
    }
}
