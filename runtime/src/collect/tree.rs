//! Merging blocks in a tree that is fixed by their numbers.

/// What can take in another of its kind.
pub(super) trait Merge {
    /// Adds `other`, which stands to the right.
    fn merge(&mut self, other: &Self);
}

/// Contributions of consecutive blocks, merged pairwise: blocks `2i` and `2i + 1` first, then
/// pairs of pairs. The tree stands on absolute block numbers, so it is the same whoever
/// computes the blocks, and rounding errors grow with the logarithm of their number.
#[derive(Debug)]
pub(super) struct Tree<T> {
    /// Maximal complete subtrees, left to right.
    nodes: Vec<Node<T>>,
}

/// A complete subtree over blocks `index * 2^level` to `(index + 1) * 2^level`.
#[derive(Debug)]
struct Node<T> {
    level: u32,
    index: u64,
    cells: Vec<T>,
}

impl<T: Merge> Tree<T> {
    pub(super) fn new() -> Self {
        Tree { nodes: Vec::new() }
    }

    /// Adds the next block.
    pub(super) fn push(&mut self, block: u64, cells: Vec<T>) {
        self.nodes.push(Node {
            level: 0,
            index: block,
            cells,
        });
        while let [.., left, right] = self.nodes.as_mut_slice() {
            let same_parent = left.index / 2 == right.index / 2;
            if left.level != right.level || !same_parent {
                return;
            }
            merge_all(&mut left.cells, &right.cells);
            left.level += 1;
            left.index /= 2;
            self.nodes.pop();
        }
    }

    /// Merges what is left, from the right; empty if there was no block.
    pub(super) fn finish(mut self) -> Vec<T> {
        let mut cells = self.nodes.pop().map_or(Vec::new(), |node| node.cells);
        while let Some(mut left) = self.nodes.pop() {
            merge_all(&mut left.cells, &cells);
            cells = left.cells;
        }
        cells
    }
}

/// Merges cell by cell.
fn merge_all<T: Merge>(left: &mut [T], right: &[T]) {
    for (a, b) in left.iter_mut().zip(right) {
        a.merge(b);
    }
}

#[cfg(test)]
mod tests {
    use super::{Merge, Tree};

    impl Merge for String {
        fn merge(&mut self, other: &String) {
            *self = format!("({self} {other})");
        }
    }

    /// Writes the tree as brackets.
    fn brackets(blocks: std::ops::Range<u64>) -> String {
        let mut tree = Tree::new();
        for block in blocks {
            tree.push(block, vec![block.to_string()]);
        }
        tree.finish().concat()
    }

    #[test]
    fn pairs_are_fixed_by_absolute_numbers() {
        assert_eq!(brackets(0..4), "((0 1) (2 3))");
        assert_eq!(brackets(0..5), "(((0 1) (2 3)) 4)");
        assert_eq!(brackets(1..7), "(1 ((2 3) ((4 5) 6)))");
        assert_eq!(brackets(6..10), "((6 7) (8 9))");
    }
}
