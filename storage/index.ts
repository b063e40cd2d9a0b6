export { openStorage, type ListedObject, type Storage, type Stored } from './client';
export { closeStorage, storage } from './instance';
