//! What a chosen layout is like: build-up order, losses, downtime, and the front of score and cost.

use super::error::LayoutError;
use super::score::Problem;
use super::search::newcomer_scores;

/// The order in which to build a layout: at each stage the telescope that raises the score most.
///
/// While fewer telescopes stand than the condition asks for there is no score, and the best pair,
/// triple... to start with is chosen by trying all starting sets of a single condition's size.
/// Gives (column, score with it and all before it).
pub fn build_up(problem: &Problem, members: &[usize], fixed: &[usize]) -> Vec<(usize, f64)> {
    let mut built: Vec<usize> = fixed.to_vec();
    let mut left: Vec<usize> = members.iter().copied().filter(|m| !fixed.contains(m)).collect();
    let need = problem.condition.clauses.iter().map(|clause| clause.least).max().unwrap_or(1);
    let mut order = Vec::new();
    if built.len() < need {
        let lacking = (need - built.len()).min(left.len());
        for column in best_start(problem, &built, &left, lacking) {
            built.push(column);
            left.retain(|&other| other != column);
            order.push((column, problem.score(&built)));
        }
    }
    while !left.is_empty() {
        let scores = newcomer_scores(problem, &built, left.iter().copied());
        let Some(&(column, score)) = scores.iter().max_by(|a, b| a.1.total_cmp(&b.1)) else {
            break;
        };
        built.push(column);
        left.retain(|&other| other != column);
        order.push((column, score));
    }
    order
}

/// The best set of `count` columns to add, by trying all.
fn best_start(problem: &Problem, built: &[usize], left: &[usize], count: usize) -> Vec<usize> {
    let mut best = (f64::NEG_INFINITY, Vec::new());
    each_subset(left.len(), count, &mut |chosen| {
        let chosen: Vec<usize> = chosen.iter().map(|&place| left[place]).collect();
        let with: Vec<usize> = built.iter().copied().chain(chosen.iter().copied()).collect();
        let score = problem.score(&with);
        if score > best.0 {
            best = (score, chosen);
        }
    });
    best.1
}

/// Calls back with every subset of `count` of the numbers below `of`, in lexicographic order.
pub fn each_subset(of: usize, count: usize, visit: &mut dyn FnMut(&[usize])) {
    let mut chosen: Vec<usize> = (0..count).collect();
    if count > of {
        return;
    }
    loop {
        visit(&chosen);
        let Some(place) = (0..count).rev().find(|&place| chosen[place] < of - count + place) else {
            return;
        };
        chosen[place] += 1;
        for next in place + 1..count {
            chosen[next] = chosen[next - 1] + 1;
        }
    }
}

/// Relative loss of score when each telescope is out, in the order of members.
pub fn losses(problem: &Problem, members: &[usize]) -> Vec<f64> {
    let whole = problem.score(members);
    let without = |out: usize| {
        let left: Vec<usize> = members.iter().copied().filter(|&member| member != out).collect();
        1.0 - problem.score(&left) / whole
    };
    members.iter().map(|&out| without(out)).collect()
}

/// Expected score when each telescope is up with probability `up`, independently.
///
/// The sum over all subsets of members of up^n (1 - up)^(N - n) x score: exact.
///
/// # Errors
/// [`LayoutError::Impossible`] for more than 16 members, over 65,536 subsets.
pub fn expected_score(problem: &Problem, members: &[usize], up: f64) -> Result<f64, LayoutError> {
    let count = members.len();
    if count > 16 {
        return Err(LayoutError::Impossible { telescopes: count });
    }
    let of_subset = |subset: u32| {
        let there = (0..count).filter(|place| subset >> place & 1 == 1);
        let standing: Vec<usize> = there.map(|place| members[place]).collect();
        let standing_count = standing.len() as i32;
        let weight = up.powi(standing_count) * (1.0 - up).powi(count as i32 - standing_count);
        if weight > 0.0 { weight * problem.score(&standing) } else { 0.0 }
    };
    Ok((0..1_u32 << count).map(of_subset).sum())
}

/// Indices of (score, cost) that no other beats in both, by rising cost.
pub fn front(points: &[(f64, f64)]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..points.len()).collect();
    order.sort_by(|&a, &b| {
        points[a].1.total_cmp(&points[b].1).then(points[b].0.total_cmp(&points[a].0))
    });
    let mut best = f64::NEG_INFINITY;
    order.retain(|&index| {
        let better = points[index].0 > best;
        best = best.max(points[index].0);
        better
    });
    order
}
