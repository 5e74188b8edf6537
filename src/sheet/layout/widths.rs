//! Shares a width among columns by what they hold.

/// What a column needs.
#[derive(Clone, Copy, Debug, Default)]
pub(in crate::sheet) struct Need {
    /// Width of its longest word: below this, words are broken.
    pub least: f32,
    /// Width at which nothing wraps.
    pub best: f32,
}

impl Need {
    /// A need that covers both.
    pub(in crate::sheet) fn and(self, other: Need) -> Need {
        Need { least: self.least.max(other.least), best: self.best.max(other.best) }
    }
}

/// Whether no column would have to break a word.
pub(in crate::sheet) fn fits(total: f32, needs: &[Need]) -> bool {
    needs.iter().map(|n| n.least).sum::<f32>() <= total
}

/// Widths that add up to `total`: everything on one line if there is room, else the longest words whole, else shared
/// in proportion.
pub(in crate::sheet) fn share(total: f32, needs: &[Need]) -> Vec<f32> {
    let least: f32 = needs.iter().map(|n| n.least).sum();
    let best: f32 = needs.iter().map(|n| n.best.max(n.least)).sum();
    if best <= 0.0 {
        let each = total / needs.len().max(1) as f32;
        return needs.iter().map(|_| each).collect();
    }
    let width = |need: &Need| {
        let wanted = need.best.max(need.least);
        if best <= total {
            wanted + (total - best) * wanted / best
        } else if least <= total {
            need.least + (total - least) * (wanted - need.least) / (best - least)
        } else {
            // Half shared equally, so that one endless word cannot starve its neighbours.
            total * 0.5 * (1.0 / needs.len() as f32 + need.least / least)
        }
    };
    needs.iter().map(width).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn need(least: f32, best: f32) -> Need {
        Need { least, best }
    }

    #[test]
    fn widths_always_add_up_to_the_total() {
        for needs in [
            vec![need(10.0, 20.0), need(5.0, 5.0)],
            vec![need(60.0, 200.0), need(30.0, 90.0)],
            vec![need(500.0, 900.0), need(1.0, 1.0)],
            vec![need(0.0, 0.0); 3],
        ] {
            let sum: f32 = share(100.0, &needs).iter().sum();
            assert!((sum - 100.0).abs() < 1e-3, "{needs:?} gave {sum}");
        }
    }

    #[test]
    fn one_endless_word_leaves_its_neighbours_room() {
        let widths = share(100.0, &[need(10_000.0, 10_000.0), need(5.0, 5.0)]);
        assert!(widths[1] >= 20.0);
    }
}
