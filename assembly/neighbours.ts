// The neighbour search as the host sees it; its parts are in tree*.ts.
export { treeBuild } from './tree';
export { treeNearest, treeNearestScratch, treeNearestTo } from './tree-nearest';
export { treeWithin, treeWithinScratch } from './tree-within';
