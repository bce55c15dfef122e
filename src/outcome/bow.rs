//! Bow's notation: the spaces between loads are lettered, and each force is named by the two spaces beside it
//! (R. H. Bow, *Economics of Construction in Relation to Framed Structures*, 1873).

use super::Load;

/// Loads beyond this number are grouped before they are lettered.
pub const MOST_LETTERED: usize = 26;

/// Letters of the spaces, in order: `a` to `z`, then `aa`.
pub fn letter(index: usize) -> String {
    const ALPHABET: &[u8; 26] = b"abcdefghijklmnopqrstuvwxyz";
    let mut text = String::new();
    let mut rest = index;
    loop {
        text.insert(0, char::from(ALPHABET[rest % 26]));
        if rest < 26 {
            return text;
        }
        rest = rest / 26 - 1;
    }
}

/// The two spaces beside each of `count` loads in order. More than [`MOST_LETTERED`] loads share letters in groups of
/// neighbours, as even as may be and the larger groups first.
pub fn spaces(count: usize) -> Vec<[String; 2]> {
    let per_group = count.div_ceil(MOST_LETTERED).max(1);
    let groups = count.div_ceil(per_group).max(1);
    let (base, larger) = (count / groups, count % groups);
    let mut out = Vec::with_capacity(count);
    for group in 0..groups {
        for _ in 0..base + usize::from(group < larger) {
            out.push([letter(group), letter(group + 1)]);
        }
    }
    out
}

/// Neighbouring loads that lie between the same two spaces: index of the first and one past the last, with the letters
/// of the spaces before and after. Falls back on [`spaces`] when the loads carry no chain of letters.
pub fn groups(loads: &[Load]) -> Vec<Group> {
    let given: Vec<[String; 2]> = loads.iter().map(|l| l.space.clone()).collect();
    let chain = given.iter().all(|s| !s[0].is_empty() && s[0] != s[1])
        && given.windows(2).all(|w| w[0] == w[1] || w[0][1] == w[1][0]);
    let letters = if chain { given } else { spaces(loads.len()) };
    let mut out: Vec<Group> = Vec::new();
    for (i, [before, after]) in letters.into_iter().enumerate() {
        match out.last_mut() {
            Some(last) if last.before == before && last.after == after => last.end = i + 1,
            _ => out.push(Group { start: i, end: i + 1, before, after }),
        }
    }
    out
}

/// Loads drawn as one force between two lettered spaces.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Group {
    /// Index of its first load.
    pub start: usize,
    /// One past its last load.
    pub end: usize,
    /// Space before it.
    pub before: String,
    /// Space after it.
    pub after: String,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn letters_run_on_after_z() {
        assert_eq!(letter(0), "a");
        assert_eq!(letter(25), "z");
        assert_eq!(letter(26), "aa");
        assert_eq!(letter(27), "ab");
        assert_eq!(letter(26 * 27), "aaa");
    }

    #[test]
    fn many_loads_share_letters() {
        for count in 0..200 {
            let s = spaces(count);
            assert_eq!(s.len(), count);
            let mut pairs = s.clone();
            pairs.dedup();
            assert!(pairs.len() <= MOST_LETTERED, "{count}");
            assert!(pairs.windows(2).all(|w| w[0][1] == w[1][0]));
            if count <= MOST_LETTERED {
                assert_eq!(pairs.len(), count);
            }
        }
    }
}
