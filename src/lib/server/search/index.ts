export { boardPage, boardPageSize, boardQuery, matchOf, type BoardFilter } from './board.ts';
export {
  requestForBidder,
  requestForBuyer,
  requestPage,
  type BuyerRequest,
  type HistoryEntry,
} from './request-page.ts';
